import { describe, expect, it } from 'vitest'
import { compareModels } from '../../../shared/control/identification/compareModels'
import type { FittedParameter } from '../../../shared/control/identification/fitModel'
import { simulatedTest } from './plants'

/** Truth of simulated loops against what is found, over kinds of plants and tests; seeds fixed, not those used while building. */
function tally(severity: number, runs: number, firstSeed: number) {
  const kinds = ['fopdt', 'integrating', 'fopdt', 'integrating', 'fopdt', 'sopdt'] as const
  const result = { runs: 0, answered: 0, good: 0, inside: 0, intervals: 0 }
  for (let i = 0; i < runs; i++) {
    const kind = kinds[i % kinds.length]
    const { model, stretches, interval, excitation } = simulatedTest(firstSeed + i, kind, Math.floor(i / kinds.length) % 2 === 0, severity)
    const { best } = compareModels(stretches, { interval, excitation, maximumDeadTime: 3 * model.deadTime })
    result.runs++
    if (best.status !== 'ok') continue
    result.answered++
    const { processGain, deadTime, timeConstant } = best.parameters
    const sameSort = (best.model.kind === 'integrating') === (kind === 'integrating')
    const near = (p: FittedParameter | undefined, truth: number) => p !== undefined && Math.abs(p.value / truth - 1) <= 0.1
    const lag = model.kind === 'integrating' ? null : model.timeConstant
    if (sameSort && near(processGain, model.processGain) && (lag === null || near(timeConstant, lag)) && Math.abs(deadTime.value - model.deadTime) <= Math.max(interval, 0.1 * model.deadTime)) result.good++
    if (!sameSort) continue
    const pairs: [FittedParameter, number][] = [[processGain, model.processGain], [deadTime, model.deadTime], ...(lag !== null ? [[timeConstant!, lag] as [FittedParameter, number]] : [])]
    for (const [p, truth] of pairs) {
      result.intervals++
      if (p.low <= truth && truth <= p.high) result.inside++
    }
  }
  return result
}

describe('identification on simulated loops with known truth', () => {
  it('nine of ten of the answers are within 10 %, nine of ten intervals hold the truth, and poor tests are refused more often', () => {
    const good = tally(0.4, 36, 770_000)
    const poor = tally(1, 36, 880_000)
    expect(good.answered / good.runs).toBeGreaterThan(0.7)
    expect(poor.answered).toBeLessThan(good.answered)
    expect((good.good + poor.good) / (good.answered + poor.answered)).toBeGreaterThanOrEqual(0.9)
    expect((good.inside + poor.inside) / (good.intervals + poor.intervals)).toBeGreaterThanOrEqual(0.9)
  })
})
