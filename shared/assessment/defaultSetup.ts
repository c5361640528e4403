import type { LoopSetup, LoopType } from './types'

/** Settling horizons by loop type, s: our defaults, shown as such. */
export const DEFAULT_SETTLING_S: Readonly<Record<LoopType, number>> = {
  flow: 30, pressure: 120, level: 600, temperature: 1800, analysis: 3600, other: 600,
}

/**
 * What a loop of a type is taken to be where its set-up says nothing. PV in per cent of range; the tolerance is 1 % of
 * span for flow and pressure, 2 % for temperature, 3 % for level (a buffer may move) and analysis.
 * Source: our defaults.
 */
export function defaultSetup(type: LoopType): Omit<LoopSetup, 'tag'> {
  const tolerance = { flow: 1, pressure: 1, level: 3, temperature: 2, analysis: 3, other: 2 }[type]
  return {
    type, pvLow: 0, pvHigh: 100, pvUnit: '%', opLow: 0, opHigh: 100,
    normalModes: ['AUTO', 'CAS', 'RCAS', 'AUTOMATIC', 'CASCADE', 'A', 'C', '1'],
    tolerance, priority: 2, deadTimeS: null, settlingS: DEFAULT_SETTLING_S[type],
    form: 'ideal', action: 'reverse', gain: null, integralTimeS: null, derivativeTimeS: null, filterTimeS: null,
    setpointWeight: null, hysteresis: null, upstream: [],
  }
}
