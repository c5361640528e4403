import type { Conversion, IdealPid, SeriesPid } from '../types'

/**
 * Series settings of an ideal PID: the branch with Ti' >= Td'. A series PID has two real zeros, so settings with
 * Ti < 4 Td (complex zeros) have no series equivalent.
 * @param ideal gain dimensionless; times s
 * @throws RangeError when a time is negative or NaN, or the integral time 0
 * Source: Åström, Hägglund (2006) Advanced PID Control. Fixture: fixtures/reference/tuning.json, conv_*.
 */
export function idealToSeries({ controllerGain, integralTime, derivativeTime }: IdealPid): Conversion<SeriesPid> {
  if (!(integralTime > 0) || !(derivativeTime >= 0)) throw new RangeError(`idealToSeries: times must be positive, got Ti ${integralTime}, Td ${derivativeTime}`)
  if (integralTime === Infinity) return { status: 'ok', value: { controllerGain, integralTime, derivativeTime } }
  const discriminant = 1 - 4 * derivativeTime / integralTime
  // Equality must survive the rounding of a conversion there and back.
  if (discriminant < -1e-12) {
    return { status: 'impossible', reason: `A series controller cannot do this: the integral time (${round(integralTime)} s) is below four times the derivative time (${round(derivativeTime)} s). Lengthen the integral time to at least ${round(4 * derivativeTime)} s or shorten the derivative time to at most ${round(integralTime / 4)} s.` }
  }
  const root = Math.sqrt(Math.max(0, discriminant))
  const half = (1 + root) / 2
  // Td' as Ti Td / Ti' rather than Ti (1 - root) / 2: no cancellation when the derivative time is small.
  return { status: 'ok', value: { controllerGain: controllerGain * half, integralTime: integralTime * half, derivativeTime: derivativeTime / half } }
}

const round = (value: number) => Number(value.toPrecision(4))
