import { select } from '../statistics/select'

/**
 * Median spacing of ascending time stamps. O(n); a perfectly regular record is answered without a copy.
 *
 * @param t epoch ms, ascending, length n
 * @returns spacing in ms, > 0; NaN for fewer than two samples
 * @throws RangeError when the stamps do not ascend
 */
export function medianInterval(t: Float64Array): number {
  const n = t.length
  if (n < 2) return NaN
  const first = t[1] - t[0]
  let regular = true
  for (let i = 1; i < n; i++) {
    const d = t[i] - t[i - 1]
    if (!(d > 0)) throw new RangeError(`medianInterval: time stamps must ascend strictly, sample ${i} does not`)
    if (d !== first) regular = false
  }
  if (regular) return first
  const d = new Float64Array(n - 1)
  for (let i = 1; i < n; i++) d[i - 1] = t[i] - t[i - 1]
  return select(d, (d.length - 1) >> 1)
}
