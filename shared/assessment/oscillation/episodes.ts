/** Fewest periods an episode lasts, and longest interruption that does not end it, in periods. */
const SHORTEST = 5
const LONGEST_BREAK = 5

/**
 * When an oscillation was there: stretches in which its envelope stays above a threshold (short interruptions bridged), less
 * the ends that the background explains better, with begin and end moved to the point where the envelope changes most
 * (best two-level fit within three periods).
 * @param envelope amplitude, `perPeriod` values to the period, length n
 * @param smooth the same, smoothed over some periods, length n: decides whether; `envelope` decides where
 * @param options threshold: amplitude; background: amplitude that noise alone would have in `smooth`
 * @returns index pairs [from, to) in the envelope, ascending, apart
 * O(n). Source: ours. Checked against bursts of known begin and end.
 */
export function episodes(envelope: Float64Array, smooth: Float64Array, { threshold, background, perPeriod }: {
  threshold: number, background: number, perPeriod: number
}): [number, number][] {
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
    .map(span => trim(smooth, span, threshold, background))
    .filter(([from, to]) => to - from >= (SHORTEST - 1) * perPeriod)
    .map(([from, to]): [number, number] => [
      from < perPeriod ? 0 : edge(envelope, Math.max(0, from - reach), Math.min(to, from + reach), 1),
      to > n - perPeriod ? n : edge(envelope, Math.max(from, to - reach), Math.min(n, to + reach), -1),
    ])
    .filter(([from, to]) => to - from >= SHORTEST * perPeriod)
}

/** The part of a stretch with the largest sum of power above what lies half-way (in logarithms) to the background. */
function trim(smooth: Float64Array, [from, to]: [number, number], threshold: number, background: number): [number, number] {
  let squares = 0, fourths = 0
  for (let i = from; i < to; i++) { const s = smooth[i] ** 2; squares += s; fourths += s * s }
  const limit = Math.max(threshold ** 2, background * Math.sqrt(fourths / squares))
  let sum = 0, begin = from, best = -Infinity, kept: [number, number] = [from, to]
  for (let i = from; i < to; i++) {
    if (sum <= 0) { sum = 0; begin = i }
    sum += smooth[i] ** 2 - limit
    if (sum > best) { best = sum; kept = [begin, i + 1] }
  }
  return kept
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
