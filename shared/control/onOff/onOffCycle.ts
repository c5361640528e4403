export interface OnOffLoop {
  /** PV unit per OP unit; per second for an integrator */
  processGain: number
  /** s; Infinity or left out: an integrator */
  timeConstant?: number
  /** s */
  deadTime: number
  /** The two outputs, OP unit. For an integrator they are counted from balance, so they differ in sign. */
  outputLow: number
  outputHigh: number
  /** PV unit, counted from PV at output 0; for an integrator any value. */
  setpoint: number
  /** Full width of the band around the set point, PV unit. */
  hysteresis: number
}

export interface OnOffCycle {
  status: 'cycle'
  /** PV unit */
  peak: number
  trough: number
  swing: number
  /** s */
  period: number
  onTime: number
  offTime: number
  /** 0..1, share of time at the high output */
  duty: number
  /** Each cycle switches on once and off once. */
  switchingsPerDay: number
}

/**
 * The steady cycle of an on-off loop by closed form: exponential (or straight) pieces between switch points, dead time exact.
 * The high output raises PV (heating). For cooling change the sign of the gain and of the outputs.
 * @returns the cycle, or why there is none: an output that cannot carry PV across the band never switches
 * @throws RangeError when gain, lag or dead time is not usable, outputs are crossed or the hysteresis negative;
 *   without dead time and hysteresis the cycle has no length
 * Source: closed form of the pieces; describing function for comparison: Åström, Hägglund (1984) Automatica 20:645-651.
 * Fixture: fixtures/reference/onOff.json.
 */
export function onOffCycle(loop: OnOffLoop): OnOffCycle | { status: 'noCycle', reason: string } {
  const { processGain, timeConstant = Infinity, deadTime, outputLow, outputHigh, setpoint, hysteresis } = loop
  if (!(processGain > 0) || !(timeConstant > 0) || !(deadTime >= 0)) throw new RangeError(`onOffCycle: gain and lag must be positive, the dead time not negative, got ${processGain}, ${timeConstant}, ${deadTime}`)
  if (!(outputHigh > outputLow)) throw new RangeError(`onOffCycle: the high output must be above the low one, got ${outputLow}, ${outputHigh}`)
  if (!(hysteresis >= 0)) throw new RangeError(`onOffCycle: the hysteresis must not be negative, got ${hysteresis}`)
  if (deadTime === 0 && hysteresis === 0) throw new RangeError('onOffCycle: without dead time and hysteresis the loop would switch infinitely often')
  const upper = setpoint + hysteresis / 2
  const lower = setpoint - hysteresis / 2
  const answer = (peak: number, trough: number, onTime: number, offTime: number): OnOffCycle => {
    const period = onTime + offTime
    return { status: 'cycle', peak, trough, swing: peak - trough, period, onTime, offTime, duty: onTime / period, switchingsPerDay: 2 * 86_400 / period }
  }
  if (timeConstant === Infinity) {
    const up = processGain * outputHigh
    const down = processGain * outputLow
    if (!(up > 0 && down < 0)) return { status: 'noCycle', reason: 'One of the outputs cannot turn PV round: an integrating process needs one that raises and one that lowers it.' }
    const peak = upper + up * deadTime
    const trough = lower + down * deadTime
    return answer(peak, trough, deadTime + (upper - trough) / up, deadTime + (peak - lower) / -down)
  }
  const hot = processGain * outputHigh
  const cold = processGain * outputLow
  if (!(hot > upper)) return { status: 'noCycle', reason: 'Even full output does not bring PV above the band: it stays on.' }
  if (!(cold < lower)) return { status: 'noCycle', reason: 'Even the low output does not bring PV below the band: it stays off.' }
  const fade = Math.exp(-deadTime / timeConstant)
  const peak = hot - (hot - upper) * fade
  const trough = cold + (lower - cold) * fade
  return answer(peak, trough, deadTime + timeConstant * Math.log((hot - trough) / (hot - upper)), deadTime + timeConstant * Math.log((peak - cold) / (lower - cold)))
}
