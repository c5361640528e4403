import type { LoopRow } from '../../../db/repositories/loops'
import { defaultSetup } from '../../../shared/assessment/defaultSetup'
import type { LoopSetup } from '../../../shared/assessment/types'
import { gainOrProportionalBand } from '../../../shared/control/forms/gainUnits'
import { integralTimeToSeconds, secondsPerUnit } from '../../../shared/control/forms/timeUnits'
import type { SiteSettings } from '../../../shared/schemas/settings'

/** A stored loop as the assessment needs it: the defaults of its type where nothing is said, times in seconds, gain in % per %. */
export function loopSetup(loop: LoopRow, settings: Pick<SiteSettings, 'toleranceByType' | 'settlingByType'>): LoopSetup {
  const defaults = defaultSetup(loop.type)
  const pvLow = loop.pvLow ?? defaults.pvLow
  const pvHigh = loop.pvHigh !== null && loop.pvHigh > pvLow ? loop.pvHigh : Math.max(defaults.pvHigh, pvLow + 1)
  const positive = (value: number | null) => value !== null && value > 0 ? value : null
  const integral = positive(loop.integralTime)
  return {
    tag: loop.tag, type: loop.type, pvLow, pvHigh, pvUnit: loop.pvUnit || (loop.pvHigh === null ? defaults.pvUnit : ''), opLow: loop.opLow, opHigh: loop.opHigh > loop.opLow ? loop.opHigh : loop.opLow + 100,
    normalModes: loop.normalModes, tolerance: positive(loop.tolerance) ?? (pvHigh - pvLow) * settings.toleranceByType[loop.type] / 100,
    priority: loop.priority, deadTimeS: loop.deadTimeS, settlingS: positive(loop.settlingS) ?? settings.settlingByType[loop.type],
    form: loop.form, action: loop.action,
    gain: positive(loop.gain) === null ? null : loop.gainUnit === 'proportionalBand' ? gainOrProportionalBand(loop.gain!) : loop.gain,
    integralTimeS: integral === null ? null : integralTimeToSeconds(integral, loop.timeUnit),
    derivativeTimeS: loop.derivativeTime === null ? null : loop.derivativeTime * secondsPerUnit(loop.timeUnit),
    filterTimeS: loop.filterTimeS, setpointWeight: loop.setpointWeight, hysteresis: positive(loop.hysteresis), upstream: loop.upstream,
  }
}
