import { fromIdeal } from '../control/forms/fromIdeal'
import { integralTimeToSeconds, secondsPerUnit } from '../control/forms/timeUnits'
import { toIdeal } from '../control/forms/toIdeal'
import type { Conversion, ControllerAction, ControllerForm, DisplayedController, IdealPid } from '../control/types'

/** Tuning as it stands in a loop's set-up. */
export interface StoredTuning {
  form: ControllerForm
  action: ControllerAction
  gain: number | null
  gainUnit: 'gain' | 'proportionalBand'
  integralTime: number | null
  derivativeTime: number | null
  timeUnit: 's' | 'min' | 'repeatsPerMin'
  filterTimeS: number | null
  setpointWeight: number | null
}

/**
 * The controller as the control system shows it; null for on-off control and where the gain is not known.
 * The set-up always holds an integral *time*. In the parallel form, whose terms stand beside each other, it is the time
 * whose reciprocal is the integral gain, as the assessment and the simulator read it too.
 */
export function storedController(loop: StoredTuning): DisplayedController | null {
  if (loop.form === 'onOff' || loop.gain === null || !(loop.gain > 0)) return null
  return {
    form: loop.form, action: loop.action, gain: loop.gain, gainUnit: loop.gainUnit, integral: loop.form === 'parallel' && loop.integralTime ? secondsPerUnit(loop.timeUnit) / integralTimeToSeconds(loop.integralTime, loop.timeUnit) : loop.integralTime, derivative: loop.derivativeTime, timeUnit: loop.timeUnit,
    ...(loop.setpointWeight !== null && { setpointWeight: loop.setpointWeight }), ...(loop.filterTimeS !== null && loop.filterTimeS > 0 && { measurementFilterTime: loop.filterTimeS }),
  }
}

/** As `toIdeal`, with a number that no controller can have told as a sentence instead of thrown. */
export function idealOf(shown: DisplayedController): Conversion<IdealPid> {
  try { return toIdeal(shown) }
  catch (error) { return { status: 'impossible', reason: (error as Error).message.replace(/^\w+: /, '') } }
}

/** As `fromIdeal`, in the form and units of `like`. */
export function shownAs(ideal: IdealPid, like: Pick<DisplayedController, 'form' | 'gainUnit' | 'timeUnit'>): Conversion<DisplayedController> {
  try { return fromIdeal(ideal, like) }
  catch (error) { return { status: 'impossible', reason: (error as Error).message.replace(/^\w+: /, '') } }
}

/** What the numbers are called in this form and these units. */
export function settingNames(like: Pick<DisplayedController, 'form' | 'gainUnit' | 'timeUnit'>): { gain: string, integral: string, derivative: string } {
  const gain = like.gainUnit === 'proportionalBand' ? 'Proportional band, %' : 'Gain'
  const time = like.timeUnit === 's' ? 's' : 'min'
  if (like.form === 'parallel') return { gain, integral: `Integral gain, 1/${time}`, derivative: `Derivative gain, ${time}` }
  return { gain, integral: like.timeUnit === 'repeatsPerMin' ? 'Integral, repeats/min' : `Integral time, ${time}`, derivative: `Derivative time, ${time}` }
}
