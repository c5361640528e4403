import type { Conversion, IdealPid, ParallelPid } from '../types'

/**
 * Ideal settings of a parallel PID. Impossible without proportional action, because the ideal form multiplies all terms by its gain.
 * @param parallel gains per PV unit: dimensionless, 1/s, s
 * @throws RangeError when a gain is NaN
 * Source: Åström, Hägglund (2006) Advanced PID Control. Fixture: fixtures/reference/tuning.json, conv_*.
 */
export function parallelToIdeal({ proportionalGain, integralGain, derivativeGain }: ParallelPid): Conversion<IdealPid> {
  if ([proportionalGain, integralGain, derivativeGain].some(Number.isNaN)) throw new RangeError('parallelToIdeal: a gain is NaN')
  if (proportionalGain === 0) return { status: 'impossible', reason: 'The proportional gain is 0: a controller with integral or derivative action alone has no ideal or series form.' }
  if (integralGain / proportionalGain < 0 || derivativeGain / proportionalGain < 0) return { status: 'impossible', reason: 'The gains have different signs: the terms would work against each other. Check the settings read from the control system.' }
  return { status: 'ok', value: { controllerGain: proportionalGain, integralTime: integralGain === 0 ? Infinity : proportionalGain / integralGain, derivativeTime: derivativeGain / proportionalGain } }
}
