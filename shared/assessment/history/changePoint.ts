export interface ChangePoint {
  /** index of the first value after the change, 1..n-1 */
  at: number
  /** K, the largest |U| */
  statistic: number
  /** two-sided, approximate; good below 0.5 */
  pValue: number
}

/**
 * The most likely single change point of a series by Pettitt's rank test: no shape of distribution is assumed.
 *
 * U(t) counts, over all pairs across t, how often the earlier value is the larger; ties count for neither.
 * Cost: n log n.
 *
 * @param x n values in time order, finite, n at least 4
 * @throws RangeError on fewer than 4 values or one that is not finite
 * Source: Pettitt (1979), A non-parametric approach to the change-point problem, Applied Statistics 28:126-135;
 * p = 2 exp(-6 K^2 / (n^3 + n^2)).
 */
export function changePoint(x: Float64Array): ChangePoint {
  const n = x.length
  if (n < 4) throw new RangeError(`changePoint: ${n} values are too few; 4 are needed`)
  for (const value of x) if (!Number.isFinite(value)) throw new RangeError(`changePoint: ${value} is not a finite value`)
  const order = Array.from(x.keys()).sort((a, b) => x[a] - x[b])
  const rank = new Float64Array(n)
  for (let i = 0; i < n;) {
    let j = i
    while (j + 1 < n && x[order[j + 1]] === x[order[i]]) j++
    for (let k = i; k <= j; k++) rank[order[k]] = (i + j) / 2 + 1
    i = j + 1
  }
  let sum = 0
  let statistic = 0
  let at = 1
  for (let t = 1; t < n; t++) {
    sum += rank[t - 1]
    const u = Math.abs(2 * sum - t * (n + 1))
    if (u > statistic) { statistic = u; at = t }
  }
  return { at, statistic, pValue: Math.min(1, 2 * Math.exp(-6 * statistic ** 2 / (n ** 3 + n ** 2))) }
}
