/**
 * Where each row of a stack of ribbons begins, px; the last number is the height of the whole.
 * Rows from `quietFrom` on are `quietHeight` high: loops that lost nothing are all there, but do not push the rest away.
 */
export function rowTops(p: { count: number, rowHeight: number, gap: number, quietFrom?: number, quietHeight?: number }): number[] {
  const from = Math.min(p.count, p.quietFrom ?? p.count)
  const tops = Array.from({ length: p.count + 1 }, (_, i) => Math.min(i, from) * (p.rowHeight + p.gap) + Math.max(0, i - from) * (p.quietHeight ?? p.rowHeight))
  // no gap under the last row
  if (from === p.count && p.count > 0) tops[p.count] -= p.gap
  return tops
}

/** The row at a height of y px, the first above all and the last below all. */
export function rowAt(tops: readonly number[], y: number): number {
  let low = 0
  let high = tops.length - 2
  while (low < high) {
    const middle = Math.ceil((low + high) / 2)
    if (tops[middle] <= y) low = middle
    else high = middle - 1
  }
  return Math.max(0, low)
}
