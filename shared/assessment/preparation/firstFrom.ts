/** First index whose time is not before `ms`; t ascends. O(log n). */
export function firstFrom(t: Float64Array, ms: number): number {
  let low = 0
  let high = t.length
  while (low < high) {
    const mid = (low + high) >> 1
    if (t[mid] < ms) low = mid + 1
    else high = mid
  }
  return low
}
