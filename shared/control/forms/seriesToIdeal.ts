import type { IdealPid, SeriesPid } from '../types'

/**
 * Ideal settings of a series PID, unfiltered derivative. Always possible.
 * @param series gain dimensionless; times s; `integralTime` Infinity when off; `derivativeTime` 0 when off
 * @throws RangeError when a time is negative or NaN, or the integral time 0
 * Source: Åström, Hägglund (2006) Advanced PID Control. Fixture: fixtures/reference/tuning.json, conv_*.
 */
export function seriesToIdeal({ controllerGain, integralTime, derivativeTime }: SeriesPid): IdealPid {
  if (!(integralTime > 0) || !(derivativeTime >= 0)) throw new RangeError(`seriesToIdeal: times must be positive, got Ti ${integralTime}, Td ${derivativeTime}`)
  if (integralTime === Infinity) return { controllerGain, integralTime, derivativeTime }
  const factor = 1 + derivativeTime / integralTime
  return { controllerGain: controllerGain * factor, integralTime: integralTime + derivativeTime, derivativeTime: derivativeTime / factor }
}
