/**
 * Decay ratio R of the autocorrelation: height of the first maximum above the line through its two neighbouring minima, over
 * the depth of the first minimum below the line from (0, 1) to that maximum. R > 0.5 counts as oscillatory (quarter decay,
 * damping below 0.2155); may exceed 1. Extrema are those of three neighbouring points, unsmoothed. O(lags).
 * @param autocorrelation from lag 0 on, any positive scale
 * @returns NaN when a minimum, a maximum and a second minimum are not all there
 * Source: Miao, Seborg 1999, "Automatic detection of excessively oscillatory feedback control loops".
 * Fixture: fixtures/reference/oscillation.json.
 */
export function decayRatio(autocorrelation: Float64Array): number {
  const a = autocorrelation
  const extrema: number[] = []
  for (let i = 1; i + 1 < a.length && extrema.length < 3; i++) {
    const wantMinimum = extrema.length % 2 === 0
    const side = wantMinimum ? 1 : -1
    if (side * a[i] < side * a[i - 1] && side * a[i] <= side * a[i + 1]) extrema.push(i)
  }
  if (extrema.length < 3) return Number.NaN
  const [first, top, second] = extrema as [number, number, number]
  const line = (at: number, from: number, to: number) => a[from] + (a[to] - a[from]) * (at - from) / (to - from)
  return (a[top] - line(top, first, second)) / (line(first, 0, top) - a[first])
}
