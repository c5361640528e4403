import type { Conversion, DisplayedController, IdealPid } from '../types'
import { gainOrProportionalBand } from './gainUnits'
import { parallelToIdeal } from './parallelToIdeal'
import { seriesToIdeal } from './seriesToIdeal'
import { integralTimeToSeconds, secondsPerUnit } from './timeUnits'

/**
 * A controller as displayed in the ideal form, seconds, signed gain: positive for reverse action, negative for direct,
 * so that process gain x controller gain is positive in a loop that acts the right way round.
 * Derivative and measurement filters and the set-point weight go through unchanged.
 * @throws RangeError when the gain is not positive or another number negative
 * Source: see the conversions used.
 */
export function toIdeal(shown: DisplayedController): Conversion<IdealPid> {
  const { form, gainUnit, timeUnit } = shown
  if (!(shown.gain > 0) && !(form === 'parallel' && gainUnit === 'gain' && shown.gain === 0)) throw new RangeError(`toIdeal: the gain must be positive, got ${shown.gain}`)
  const gain = gainUnit === 'proportionalBand' ? gainOrProportionalBand(shown.gain) : shown.gain
  const unit = secondsPerUnit(timeUnit)
  const derivative = shown.derivative ?? 0
  if (!(derivative >= 0)) throw new RangeError(`toIdeal: the derivative setting must not be negative, got ${derivative}`)
  if (form === 'parallel' && !((shown.integral ?? 0) >= 0)) throw new RangeError(`toIdeal: the integral setting must not be negative, got ${shown.integral}`)

  const converted: Conversion<IdealPid> = form === 'parallel'
    ? parallelToIdeal({ proportionalGain: gain, integralGain: (shown.integral ?? 0) / unit, derivativeGain: derivative * unit })
    : { status: 'ok', value: (form === 'series' ? seriesToIdeal : (x: IdealPid) => x)({ controllerGain: gain, integralTime: integralTimeToSeconds(shown.integral, timeUnit), derivativeTime: derivative * unit }) }
  if (converted.status === 'impossible') return converted
  const value: IdealPid = { ...converted.value, controllerGain: shown.action === 'direct' ? -converted.value.controllerGain : converted.value.controllerGain }
  if (shown.setpointWeight !== undefined) value.setpointWeight = shown.setpointWeight
  if (shown.derivativeFilterFactor !== undefined) value.derivativeFilterFactor = shown.derivativeFilterFactor
  if (shown.measurementFilterTime !== undefined) value.measurementFilterTime = shown.measurementFilterTime
  return { status: 'ok', value }
}
