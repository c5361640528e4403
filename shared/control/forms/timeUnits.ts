import type { DisplayedController } from '../types'

type TimeUnit = DisplayedController['timeUnit']

/**
 * Integral time in seconds of the number shown.
 * @param shown positive, or null / 0 where integral action is off (both spellings are in use: common practice, no source)
 * @returns s; Infinity when off
 * @throws RangeError when negative or NaN
 * Source: definition (repeats per minute = 60 / Ti). Fixture: fixtures/reference/tuning.json, conv_units.
 */
export function integralTimeToSeconds(shown: number | null, unit: TimeUnit): number {
  if (shown === null || shown === 0 || shown === Infinity) return Infinity
  if (!(shown > 0)) throw new RangeError(`integralTimeToSeconds: must be positive, got ${shown}`)
  return unit === 's' ? shown : unit === 'min' ? shown * 60 : 60 / shown
}

/** The way back: seconds to the number shown; Infinity becomes null. Same errors. */
export function integralTimeFromSeconds(seconds: number, unit: TimeUnit): number | null {
  if (!(seconds > 0)) throw new RangeError(`integralTimeFromSeconds: must be positive, got ${seconds}`)
  if (seconds === Infinity) return null
  return unit === 's' ? seconds : unit === 'min' ? seconds / 60 : 60 / seconds
}

/** Seconds per unit of derivative time: controllers that show repeats per minute show the derivative in minutes (common practice, no source). */
export function secondsPerUnit(unit: TimeUnit): number {
  return unit === 's' ? 1 : 60
}
