import { autocovariance } from './autocovariance'

/**
 * Sample autocorrelation r_k = c_k / c_0 of the mean-removed record, biased (divisor n at every lag), lags 0..maxLag.
 *
 * @param x length n >= 1, finite numbers
 * @param maxLag integer 0..n-1
 * @returns length maxLag + 1, r_0 = 1, |r_k| <= 1; all NaN for a constant record, where it is undefined
 * @throws RangeError on a value that is not finite, an empty record or a lag outside 0..n-1
 * Source: Box, Jenkins (1976) Time Series Analysis, section 2.1.5; the variant of R stats::acf.
 * Reference: fixtures/reference/autoregression.json (R), nist.json (certified lag-1). Cost O(n log maxLag).
 */
export function autocorrelation(x: Float64Array, maxLag: number): Float64Array {
  const r = autocovariance(x, maxLag)
  const c0 = r[0]
  for (let k = 0; k <= maxLag; k++) r[k] = c0 > 0 ? r[k] / c0 : NaN
  return r
}
