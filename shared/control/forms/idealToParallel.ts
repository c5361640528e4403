import type { IdealPid, ParallelPid } from '../types'

/**
 * Parallel gains of an ideal PID. Always possible.
 * @param ideal gain dimensionless; times s
 * @throws RangeError when a time is negative or NaN, or the integral time 0
 * Source: Åström, Hägglund (2006) Advanced PID Control. Fixture: fixtures/reference/tuning.json, conv_*.
 */
export function idealToParallel({ controllerGain, integralTime, derivativeTime }: IdealPid): ParallelPid {
  if (!(integralTime > 0) || !(derivativeTime >= 0)) throw new RangeError(`idealToParallel: times must be positive, got Ti ${integralTime}, Td ${derivativeTime}`)
  return { proportionalGain: controllerGain, integralGain: controllerGain / integralTime, derivativeGain: controllerGain * derivativeTime }
}
