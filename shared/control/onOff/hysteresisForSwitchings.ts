import { onOffCycle, type OnOffLoop } from './onOffCycle'

/**
 * The hysteresis that gives a wanted number of switchings a day, by bisection on the closed form: the cycle grows with it.
 * @param switchingsPerDay positive
 * @returns full width, PV unit; or why no width gives that number
 * @throws RangeError as `onOffCycle`, or when the number is not positive
 * Source: inverse of `onOffCycle`.
 */
export function hysteresisForSwitchings(loop: Omit<OnOffLoop, 'hysteresis'>, switchingsPerDay: number): { status: 'ok', hysteresis: number } | { status: 'impossible', reason: string } {
  if (!(switchingsPerDay > 0)) throw new RangeError(`hysteresisForSwitchings: the number must be positive, got ${switchingsPerDay}`)
  const { processGain, timeConstant = Infinity, deadTime, outputLow, outputHigh, setpoint } = loop
  if (deadTime > 0) {
    const narrowest = onOffCycle({ ...loop, hysteresis: 0 })
    if (narrowest.status === 'noCycle') return { status: 'impossible', reason: narrowest.reason }
    if (narrowest.switchingsPerDay < switchingsPerDay) return { status: 'impossible', reason: `The dead time alone keeps the loop below ${Math.round(narrowest.switchingsPerDay)} switchings a day, whatever the hysteresis.` }
  }
  // The band must stay within what the outputs can reach.
  let high = timeConstant === Infinity ? processGain * (outputHigh - outputLow) * 86_400 : 2 * Math.min(processGain * outputHigh - setpoint, setpoint - processGain * outputLow)
  if (!(high > 0)) return { status: 'impossible', reason: 'One of the outputs cannot carry PV across the set point.' }
  let low = 0
  high *= 1 - 1e-12
  for (let i = 0; i < 200 && high - low > 1e-14 * high; i++) {
    const middle = (low + high) / 2
    const cycle = onOffCycle({ ...loop, hysteresis: middle })
    if (cycle.status === 'cycle' && cycle.switchingsPerDay > switchingsPerDay) low = middle
    else high = middle
  }
  return { status: 'ok', hysteresis: (low + high) / 2 }
}
