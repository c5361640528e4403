/** Fewest periods an episode lasts, and longest interruption that does not end it, in periods. */
const SHORTEST = 5
const LONGEST_BREAK = 5

/**
 * When an oscillation was there: stretches in which its envelope stays above a threshold, with begin and end moved to the
 * point where the envelope changes most (best two-level fit within three periods).
 * @param envelope amplitude, `perPeriod` values to the period, length n
 * @param smooth the same, smoothed over some periods, length n: decides whether; `envelope` decides where
 * @returns index pairs [from, to) in the envelope, ascending, apart
 * O(n). Source: ours. Checked against bursts of known begin and end.
 */
export function episodes(envelope: Float64Array, smooth: Float64Array, { threshold, perPeriod }: { threshold: number, perPeriod: number }): [number, number][] {
  const n = envelope.length
  const joined: [number, number][] = []
  for (let i = 0; i < n; i++) {
    if (!(smooth[i] > threshold)) continue
    let end = i
    while (end < n && smooth[end] > threshold) end++
    const previous = joined[joined.length - 1]
    if (previous && i - previous[1] < LONGEST_BREAK * perPeriod) previous[1] = end
    else joined.push([i, end])
    i = end
  }
  const reach = Math.round(3 * perPeriod)
  return joined
    .map(([from, to]): [number, number] => [
      from < perPeriod ? 0 : edge(envelope, Math.max(0, from - reach), Math.min(to, from + reach), 1),
      to > n - perPeriod ? n : edge(envelope, Math.max(from, to - reach), Math.min(n, to + reach), -1),
    ])
    .filter(([from, to]) => to - from >= SHORTEST * perPeriod)
}

/** Index in (from, to) at which a rise (+1) or fall (-1) splits the stretch into two levels with the least squares left. */
function edge(envelope: Float64Array, from: number, to: number, side: 1 | -1): number {
  let total = 0
  for (let i = from; i < to; i++) total += envelope[i]
  const n = to - from
  let sum = 0, best = 0, at = side > 0 ? from : to
  for (let i = 1; i < n; i++) {
    sum += envelope[from + i - 1]
    const contrast = side * ((total - sum) / (n - i) - sum / i)
    const gain = contrast > 0 ? contrast * contrast * i * (n - i) : 0
    if (gain > best) { best = gain; at = from + i }
  }
  return at
}
