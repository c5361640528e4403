import type { LoopSetup } from '../types'
import type { LoopScenario } from './scenario'
import { simulateLoop } from './simulateLoop'

/**
 * Standard deviation of a loop's control error over its first day without events, in per cent of span: what a loop that it
 * upsets is given a share of.
 * Source: definition.
 */
export function errorDeviation(setup: LoopSetup, scenario: LoopScenario): number {
  const { record } = simulateLoop(setup, { ...scenario, durationS: Math.min(scenario.durationS, 86_400), events: [], compression: null })
  let sum = 0
  let square = 0
  const n = record.pv.length
  for (let i = 0; i < n; i++) {
    const e = record.sp![i] - record.pv[i]
    sum += e
    square += e * e
  }
  return Math.sqrt(square / n - (sum / n) ** 2) * 100 / (setup.pvHigh - setup.pvLow)
}
