import { deviations } from './deviations'
import { laggedProducts } from './laggedProducts'
import { workingMemory } from './workingMemory'

/**
 * Biased sample autocovariance c_k = (1/n) sum_t (x_t - m)(x_(t+k) - m), lags 0..maxLag.
 *
 * The divisor n, not n - k, keeps the sequence positive semidefinite, which Yule-Walker and the spectrum need.
 *
 * @param x length n >= 1, finite
 * @param maxLag integer 0..n-1
 * @returns length maxLag + 1, square of the unit of x; all 0 for a constant record
 * @throws RangeError on a value that is not finite, an empty record or a lag outside 0..n-1
 * Source: G. E. P. Box, G. M. Jenkins (1976) Time Series Analysis, section 2.1.5; R stats::acf(type = "covariance").
 * Reference: fixtures/reference/autoregression.json (acf). Cost O(n log maxLag).
 */
export function autocovariance(x: Float64Array, maxLag: number): Float64Array {
  const d = deviations(x, 'x', workingMemory(x.length))
  const c = laggedProducts(d, d, maxLag)
  for (let k = 0; k <= maxLag; k++) c[k] /= x.length
  return c
}
