import type { Conversion, DisplayedController, IdealPid } from '../types'
import { gainOrProportionalBand } from './gainUnits'
import { idealToParallel } from './idealToParallel'
import { idealToSeries } from './idealToSeries'
import { integralTimeFromSeconds, secondsPerUnit } from './timeUnits'

/**
 * An ideal PID in the form and units that a control system shows; the way back of `toIdeal`.
 * @param ideal signed gain: positive becomes reverse action, negative direct
 * @throws RangeError when the gain is 0 or a time is negative
 * Source: see the conversions used.
 */
export function fromIdeal(ideal: IdealPid, target: Pick<DisplayedController, 'form' | 'gainUnit' | 'timeUnit'>): Conversion<DisplayedController> {
  const { form, gainUnit, timeUnit } = target
  if (!ideal.controllerGain) throw new RangeError(`fromIdeal: the gain must not be 0, got ${ideal.controllerGain}`)
  const positive = { ...ideal, controllerGain: Math.abs(ideal.controllerGain) }
  const unit = secondsPerUnit(timeUnit)
  let gain = positive.controllerGain
  let integral: number | null
  let derivative: number
  if (form === 'parallel') {
    const parallel = idealToParallel(positive)
    integral = parallel.integralGain === 0 ? null : parallel.integralGain * unit
    derivative = parallel.derivativeGain / unit
  }
  else {
    const series = form === 'series' ? idealToSeries(positive) : { status: 'ok' as const, value: positive }
    if (series.status === 'impossible') return series
    gain = series.value.controllerGain
    integral = integralTimeFromSeconds(series.value.integralTime, timeUnit)
    derivative = series.value.derivativeTime / unit
  }
  const value: DisplayedController = { form, action: ideal.controllerGain > 0 ? 'reverse' : 'direct', gain: gainUnit === 'proportionalBand' ? gainOrProportionalBand(gain) : gain, gainUnit, integral, derivative, timeUnit }
  if (ideal.setpointWeight !== undefined) value.setpointWeight = ideal.setpointWeight
  if (ideal.derivativeFilterFactor !== undefined) value.derivativeFilterFactor = ideal.derivativeFilterFactor
  if (ideal.measurementFilterTime !== undefined) value.measurementFilterTime = ideal.measurementFilterTime
  return { status: 'ok', value }
}
