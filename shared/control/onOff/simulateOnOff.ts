import type { OnOffLoop } from './onOffCycle'

/**
 * Simulates an on-off loop from rest at `startPv`, the output on; exact lag, dead time in whole steps, for previews.
 * @param horizon s
 * @param step s; a hundredth of dead time or lag when left out
 * @param upsets added to the output as it reaches the process, OP unit, between `at` and `until` s
 * @throws RangeError when the horizon or the step is not positive
 * Source: exact discretisation. Fixture: fixtures/reference/onOff.json.
 */
export function simulateOnOff(loop: OnOffLoop, { horizon, startPv, step, upsets = [] }: { horizon: number, startPv: number, step?: number, upsets?: { at: number, until: number, size: number }[] }): { time: Float64Array, pv: Float64Array, sp: Float64Array, op: Float64Array } {
  const { processGain, timeConstant = Infinity, deadTime, outputLow, outputHigh, setpoint, hysteresis } = loop
  const wanted = step ?? Math.min(deadTime > 0 ? deadTime : Infinity, timeConstant < Infinity ? timeConstant : Infinity) / 100
  if (!(horizon > 0) || !(wanted > 0) || wanted === Infinity) throw new RangeError(`simulateOnOff: horizon and step must be positive, got ${horizon}, ${wanted}`)
  const delay = Math.ceil(deadTime / wanted - 1e-9)
  const h = delay > 0 ? deadTime / delay : wanted
  const n = Math.floor(horizon / h)
  const time = new Float64Array(n + 1)
  const pv = new Float64Array(n + 1)
  const sp = new Float64Array(n + 1).fill(setpoint)
  const op = new Float64Array(n + 1)
  const f = timeConstant === Infinity ? 1 : Math.exp(-h / timeConstant)
  const g = timeConstant === Infinity ? processGain * h : processGain * (1 - f)
  // What kept PV at rest acts on until the first output has passed the dead time.
  const rest = timeConstant === Infinity ? 0 : startPv / processGain
  let on = true
  for (let k = 0; k <= n; k++) {
    time[k] = k * h
    const j = k - 1 - delay
    let input = j >= 0 ? op[j] : rest
    for (const upset of upsets) if (time[k] > upset.at && time[k] <= upset.until) input += upset.size
    pv[k] = k === 0 ? startPv : f * pv[k - 1] + g * input
    if (on && pv[k] >= setpoint + hysteresis / 2) on = false
    else if (!on && pv[k] <= setpoint - hysteresis / 2) on = true
    op[k] = on ? outputHigh : outputLow
  }
  return { time, pv, sp, op }
}
