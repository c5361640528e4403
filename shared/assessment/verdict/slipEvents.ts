/**
 * Slips: PV stands off the set point while the output pushes, then jumps across it. One or two of them show a sticking valve in a record too
 * short or too uneven for a rhythm.
 *
 * Half-cycles of the error at least 16 samples long, whose median size is above 3 noise deviations and 0.6 of the rms error, are looked at. A half-cycle ends in a
 * slip when, at its end, PV goes from 0.7 of that median to 0.5 of it on the other side within the larger of 3 samples and 15 % of
 * the half-cycle, while before it PV kept within 0.7 of the jump and the output moved on in the direction that asks for the
 * jump, and the jump is PV's, not the set point's. A sine needs 41 % of its half-cycle for that way, a triangle 60 %. Load steps start from a settled error, so they do not qualify.
 * Works where PV follows the valve within a few samples. Cost O(n). Source: ours, after the phases of a sticking valve in Choudhury, Thornhill,
 * Shah 2005, Modelling valve stiction.
 */
export interface SlipEvents {
  /** half-cycles long and large enough to show a slip */
  looked: number
  slips: number
}

const SHORTEST = 16

/**
 * @param y PV less set point, regular samples, finite, length n
 * @param pv same length; tells a jump of PV from one of the set point
 * @param op same length
 * @param sign of the process gain
 * @param noise standard deviation of y's noise
 */
export function slipEvents(y: Float64Array, pv: Float64Array, op: Float64Array, sign: 1 | -1, noise: number): SlipEvents {
  if (y.length !== op.length || y.length !== pv.length) throw new RangeError(`slipEvents: y, pv and op must have one length, got ${y.length}, ${pv.length} and ${op.length}`)
  const n = y.length
  const zone = 1.5 * noise
  let squares = 0
  for (let i = 0; i < n; i++) squares += y[i] * y[i]
  const least = Math.max(3 * noise, 0.6 * Math.sqrt(squares / n))
  let looked = 0
  let slips = 0
  let side = 0
  let from = 0
  for (let i = 0; i < n; i++) {
    const now = y[i] > zone ? 1 : y[i] < -zone ? -1 : 0
    if (now === 0 || now === side) continue
    // the half-cycle from..i ends here
    if (side !== 0 && i - from >= SHORTEST) {
      const length = i - from
      const sorted = y.slice(from, i).sort()
      const size = Math.abs(sorted[length >> 1])
      if (size > least) {
        looked++
        const most = Math.max(3, Math.round(0.15 * length))
        let leave = i - 1
        while (leave > from && side * y[leave] < 0.7 * size) leave--
        let arrive = i
        while (arrive < n && arrive - leave <= most && -side * y[arrive] < 0.5 * size) arrive++
        const quick = arrive < n && arrive - leave <= most
        const jump = quick ? Math.abs(y[arrive] - y[leave]) : 0
        const early = from + Math.round(0.3 * length)
        // below the set point (side -1) a positive process asks for more output
        const push = -side * sign * (op[leave] - op[early])
        const own = quick && Math.abs(pv[arrive] - pv[leave]) > 0.7 * jump
        let low = Infinity
        let high = -Infinity
        for (let k = early; k <= leave; k++) {
          if (y[k] < low) low = y[k]
          if (y[k] > high) high = y[k]
        }
        if (own && push > 0 && high - low < 0.7 * jump) slips++
      }
    }
    side = now
    from = i
  }
  return { looked, slips }
}
