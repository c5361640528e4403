import type { ControllerForm } from '../../control/types'

/**
 * Settings of a controller form as those of the ideal form. In the parallel form the three terms are independent: gain,
 * 1 / integral time and derivative time act on the error by themselves.
 * @returns controllerGain as given in its unit; integralTime Infinity without integral action
 * Source: K. J. Åström, T. Hägglund (2006) Advanced PID Control, 3.2.
 */
export function idealTuning(form: ControllerForm, gain: number, integralTimeS: number | null, derivativeTimeS: number | null): { controllerGain: number, integralTime: number, derivativeTime: number } {
  const Ti = integralTimeS && integralTimeS > 0 ? integralTimeS : Infinity
  const Td = derivativeTimeS ?? 0
  if (form === 'series') {
    const factor = 1 + Td / Ti
    return { controllerGain: gain * factor, integralTime: Ti === Infinity ? Infinity : Ti + Td, derivativeTime: Td / factor }
  }
  if (form === 'parallel') return { controllerGain: gain, integralTime: gain * Ti, derivativeTime: gain > 0 ? Td / gain : 0 }
  return { controllerGain: gain, integralTime: Ti, derivativeTime: Td }
}
