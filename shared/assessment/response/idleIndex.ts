import { insufficient, type Insufficient } from '../types'

export interface IdleIndexResult {
  /** (timeTogether - timeApart) / their sum, -1..1: near 1 sluggish, near 0 as it should be, near -1 quick or oscillating */
  index: number
  /** samples in which output and process variable move the same way (seen with the process's sign) */
  together: number
  apart: number
}

/**
 * Idle index: share of time in which output and process variable move the same way, less the share in which they move apart.
 * Raw variant: every increment counts, however small. O(n).
 *
 * On noise-free load responses the exponential tail decides (0.73 for a sluggish and for a well tuned loop alike): use it on
 * a stretch that ends where the deviation has come down to 5 % of its peak (`untilSettled`), on filtered data.
 * @param op controller output, length n >= 2; NaN increments do not count
 * @param pv process variable, length n
 * @param processSign sign of the process gain
 * @returns insufficient when neither ever moves together with the other
 * Source: Hägglund 1999, "Automatic detection of sluggish control loops". Fixture: fixtures/reference/idle.json.
 */
export function idleIndex(op: Float64Array, pv: Float64Array, processSign: 1 | -1 = 1): IdleIndexResult | Insufficient {
  if (op.length !== pv.length) throw new RangeError(`op and pv must have one length, got ${op.length} and ${pv.length}`)
  let together = 0, apart = 0
  for (let i = 1; i < op.length; i++) {
    const product = (op[i] - op[i - 1]) * (pv[i] - pv[i - 1]) * processSign
    if (product > 0) together++
    else if (product < 0) apart++
  }
  if (!(together + apart)) return insufficient('output and process variable never move at the same time')
  return { index: (together - apart) / (together + apart), together, apart }
}
