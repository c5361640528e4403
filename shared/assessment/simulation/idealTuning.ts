import { parallelToIdeal } from '../../control/forms/parallelToIdeal'
import { seriesToIdeal } from '../../control/forms/seriesToIdeal'
import type { ControllerForm, IdealPid } from '../../control/types'

/**
 * Settings of a loop's set-up as those of the ideal form. In the parallel form the three terms are independent: gain,
 * 1 / integral time and derivative time act on the error by themselves.
 * @returns controllerGain as given in its unit; integralTime Infinity without integral action
 * @throws RangeError for a parallel controller without proportional action, which has no ideal form
 * Source: the conversions of shared/control.
 */
export function idealTuning(form: ControllerForm, gain: number, integralTimeS: number | null, derivativeTimeS: number | null): IdealPid {
  const integralTime = integralTimeS && integralTimeS > 0 ? integralTimeS : Infinity
  const derivativeTime = derivativeTimeS ?? 0
  const given = { controllerGain: gain, integralTime, derivativeTime }
  if (form === 'series') return seriesToIdeal(given)
  if (form !== 'parallel') return given
  const converted = parallelToIdeal({ proportionalGain: gain, integralGain: 1 / integralTime, derivativeGain: derivativeTime })
  if (converted.status !== 'ok') throw new RangeError(converted.reason)
  return converted.value
}
