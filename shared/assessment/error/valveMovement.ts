/**
 * Valve travel and reversals from the controller output, in all modes, over neighbouring samples of the native grid.
 *
 * Travel: sum of |change of OP| in % of span, per day of time with OP. Reversals: turns of OP that are larger than the
 * noise band on both sides, per day. Noise band (our default): the larger of 0.2 % of span and the 6 standard
 * deviations (+-3) that OP's noise spans, estimated from the median absolute second difference (0.6745 sqrt 6 sigma for white noise).
 * On-off outputs: a switching is a change of more than half the span; switchings per day are counted with the same walk.
 * Cost O(n). Source: definition; the constant of the noise estimate is that of the normal distribution.
 *
 * @param op controller output, OP unit, NaN where missing
 * @param stretches index pairs without a long gap
 * @param intervalS native interval, s
 * @param opSpan width of the OP range, > 0
 */
import { select } from '../statistics/select'

export interface ValveMovement {
  travelPerDay: number
  reversalsPerDay: number
  switchingsPerDay: number
  noiseBand: number
  samples: number
}

export function valveMovement(op: Float64Array, stretches: { begin: number, end: number }[], intervalS: number, opSpan: number): ValveMovement {
  if (!(opSpan > 0)) throw new RangeError(`valveMovement: opSpan must be above 0, got ${opSpan}`)
  const sigma = noiseSigma(op)
  const band = Math.max(0.002 * opSpan, 6 * sigma)
  let travel = 0
  let pairs = 0
  let samples = 0
  let reversals = 0
  let switchings = 0
  for (const s of stretches) {
    let last = NaN
    let low = NaN
    let high = NaN
    let direction = 0
    for (let i = s.begin; i < s.end; i++) {
      const x = op[i]
      if (x !== x) continue
      samples++
      if (last === last) {
        const d = Math.abs(x - last)
        travel += d
        pairs++
        if (d > 0.5 * opSpan) switchings++
      }
      else {
        low = high = x
      }
      last = x
      if (direction >= 0 && x > high) high = x
      if (direction <= 0 && x < low) low = x
      if (direction === 0) {
        if (x > low + band) {
          direction = 1
          high = x
        }
        else if (x < high - band) {
          direction = -1
          low = x
        }
      }
      else if (direction === 1 && x < high - band) {
        reversals++
        direction = -1
        low = x
      }
      else if (direction === -1 && x > low + band) {
        reversals++
        direction = 1
        high = x
      }
    }
  }
  const days = (pairs * intervalS) / 86_400
  return {
    travelPerDay: days > 0 ? ((travel / opSpan) * 100) / days : NaN,
    reversalsPerDay: days > 0 ? reversals / days : NaN,
    switchingsPerDay: days > 0 ? switchings / days : NaN,
    noiseBand: band,
    samples,
  }
}

/** Noise from second differences; a sample of at most 4096 of them is enough for a band. */
function noiseSigma(op: Float64Array): number {
  const n = op.length
  const step = Math.max(1, Math.floor((n - 2) / 4096))
  const d = new Float64Array(Math.max(0, Math.ceil((n - 2) / step)))
  let k = 0
  for (let i = 1; i + 1 < n; i += step) {
    const x = Math.abs(op[i + 1] - 2 * op[i] + op[i - 1])
    if (x === x) d[k++] = x
  }
  if (k < 20) return 0
  return select(d.subarray(0, k), k >> 1) / (0.6745 * Math.sqrt(6))
}
