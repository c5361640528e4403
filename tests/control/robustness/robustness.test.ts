import { describe, expect, it } from 'vitest'
import { robustnessToDoubt } from '../../../shared/control/robustness/robustnessToDoubt'
import type { ProcessModel } from '../../../shared/control/types'

const model: ProcessModel = { kind: 'fopdt', processGain: 1, timeConstant: 8, deadTime: 1 }
// SIMC with tauC = theta; Skogestad (2003): gain margin pi, delay margin 2.14 dead times.
const controller = { controllerGain: 4, integralTime: 8, derivativeTime: 0 }
const loop = { model, controller, horizon: 40, setpoint: { at: 0, size: 1 } }

describe('robustnessToDoubt', () => {
  it('keeps the published margins of SIMC: stable with 50 % more gain and 30 % more dead time at once', () => {
    const { cases, worst } = robustnessToDoubt(loop)
    expect(cases.every(c => c.margins.stable)).toBe(true)
    expect(cases[0].margins.gainMargin).toBeCloseTo(Math.PI, 6)
    expect(cases.find(c => c.name === 'gain +50 %')!.margins.gainMargin).toBeCloseTo(Math.PI / 1.5, 6)
    expect(cases[worst].name).toBe('gain +50 % and dead time +30 %')
  })
  it('finds the loop that does not survive the doubt', () => {
    const { cases, worst } = robustnessToDoubt({ ...loop, controller: { ...controller, controllerGain: 9 } })
    expect(cases[0].margins.stable).toBe(true)
    expect(cases[worst].margins.stable).toBe(false)
  })
  it('adds the corners of the intervals', () => {
    const { cases } = robustnessToDoubt(loop, { processGain: { low: 0.9, high: 1.1 }, timeConstant: { low: 7, high: 9 }, deadTime: { low: 0.8, high: 1.2 } })
    expect(cases).toHaveLength(6 + 8)
    expect(cases.some(c => c.name === 'interval: gain high, lag low, dead time high')).toBe(true)
  })
  it('leaves its input alone', () => {
    robustnessToDoubt(Object.freeze({ ...loop, model: Object.freeze({ ...model }) }))
  })
})
