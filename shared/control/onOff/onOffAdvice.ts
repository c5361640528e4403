import { simc } from '../rules/simc'
import type { IdealPid } from '../types'
import { hysteresisForSwitchings } from './hysteresisForSwitchings'
import { onOffCycle, type OnOffCycle, type OnOffLoop } from './onOffCycle'

export interface OnOffAdvice {
  expected: OnOffCycle | { status: 'noCycle', reason: string }
  /** Width for the wanted number of switchings, and the swing it costs. */
  hysteresis: { status: 'ok', hysteresis: number, swing: number } | { status: 'impossible', reason: string }
  /** Days until the switching element reaches its rated number, at the expected rate; null without a rating. */
  lifeDays: number | null
  /** PID whose output is the share of on-time within a fixed cycle. */
  timeProportioned: { cycleTime: number, controller: IdealPid | null, switchingsPerDay: number, ripple: number, sentence: string }
  sentences: string[]
}

/**
 * Advice for an on-off loop: what it must do by its hysteresis, dead time and lag, which hysteresis gives a wanted number
 * of switchings, and what moving to a time-proportioned PID would bring.
 * @param wantedSwitchingsPerDay positive; left out: half of the expected
 * @param ratedSwitchings number of operations that relay or valve is made for
 * @throws RangeError as `onOffCycle`
 * Source: closed form; SIMC for the PID; the cycle time (a quarter of dead time plus lag at most, but so long that the
 *   switchings stay below the wanted number) is common practice, no source. Ripple: closed form of a periodic on-off input to a lag.
 */
export function onOffAdvice(loop: OnOffLoop, options: { wantedSwitchingsPerDay?: number, ratedSwitchings?: number } = {}): OnOffAdvice {
  const expected = onOffCycle(loop)
  const sentences: string[] = []
  const rate = expected.status === 'cycle' ? expected.switchingsPerDay : 0
  const wanted = options.wantedSwitchingsPerDay ?? (rate > 0 ? rate / 2 : 1)
  const found = hysteresisForSwitchings(loop, wanted)
  const wider = found.status === 'ok' ? onOffCycle({ ...loop, hysteresis: found.hysteresis }) : null
  const hysteresis: OnOffAdvice['hysteresis'] = found.status === 'ok'
    ? { status: 'ok', hysteresis: found.hysteresis, swing: wider?.status === 'cycle' ? wider.swing : NaN }
    : found
  const lifeDays = options.ratedSwitchings !== undefined && rate > 0 ? options.ratedSwitchings / rate : null

  const { processGain, timeConstant = Infinity, deadTime, outputLow, outputHigh } = loop
  const slowest = deadTime + (timeConstant === Infinity ? 4 * deadTime : timeConstant)
  const cycleTime = Math.max(slowest / 4, 2 * 86_400 / wanted)
  const model = timeConstant === Infinity ? { kind: 'integrating' as const, processGain, deadTime } : { kind: 'fopdt' as const, processGain, timeConstant, deadTime }
  // The fixed cycle delays the output by half of itself on average.
  const tuned = simc({ ...model, deadTime: deadTime + cycleTime / 2 })
  // Worst at half duty: triangle for an integrator, exponential pieces for a lag.
  const ripple = timeConstant === Infinity
    ? processGain * (outputHigh - outputLow) * cycleTime / 4
    : processGain * (outputHigh - outputLow) * Math.tanh(cycleTime / 4 / timeConstant)
  const better = expected.status === 'cycle' && ripple < expected.swing
  if (expected.status === 'cycle') sentences.push('An on-off loop never settles: it swings around the set point, and the swing grows with the dead time. This is its nature, not a fault.')
  else sentences.push(expected.reason)
  if (expected.status === 'cycle' && expected.swing > 2 * loop.hysteresis) sentences.push('Most of the swing comes from the dead time, not from the hysteresis: a narrower hysteresis would add switchings and hardly narrow the swing. A shorter dead time (sensor place, faster actuator) or a smaller difference between the outputs helps.')
  if (hysteresis.status === 'impossible') sentences.push(hysteresis.reason)
  const sentence = better
    ? 'A time-proportioned PID would keep the mean at the set point with a smaller ripple, if the switching element stands the number of operations.'
    : 'A time-proportioned PID with so few switchings would ripple as much as the on-off loop swings; it needs an element that stands more operations.'
  sentences.push(sentence)
  return { expected, hysteresis, lifeDays, timeProportioned: { cycleTime, controller: tuned.status === 'ok' ? tuned.controller : null, switchingsPerDay: 2 * 86_400 / cycleTime, ripple, sentence }, sentences }
}
