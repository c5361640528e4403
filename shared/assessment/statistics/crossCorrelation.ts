import { deviations } from './deviations'
import { laggedProducts } from './laggedProducts'

/**
 * Sample cross-correlation of two mean-removed records, lags -maxLag..maxLag, in R's convention.
 *
 * Lag k, at index maxLag + k, holds the correlation of x_(t+k) with y_t. A peak at k > 0 says that x follows y by k
 * samples; at k < 0 that y follows x. Biased: divisor n at every lag.
 *
 * @param x length n >= 1, finite
 * @param y length n, finite
 * @param maxLag integer 0..n-1
 * @returns length 2 maxLag + 1, values in -1..1; all NaN when x or y is constant
 * @throws RangeError on unequal lengths, a value that is not finite, or a lag outside 0..n-1
 * Source: G. E. P. Box, G. M. Jenkins (1976) Time Series Analysis, section 11.1; the variant and sign of R stats::ccf.
 * Reference: fixtures/reference/r-correlation.json. Cost O(n log maxLag).
 */
export function crossCorrelation(x: Float64Array, y: Float64Array, maxLag: number): Float64Array {
  if (x.length !== y.length) throw new RangeError(`cross-correlation needs records of one length, got ${x.length} and ${y.length}`)
  const dx = deviations(x, 'x')
  const dy = deviations(y, 'y')
  const later = laggedProducts(dy, dx, maxLag)
  const earlier = laggedProducts(dx, dy, maxLag)
  let sx = 0
  let sy = 0
  for (let t = 0; t < dx.length; t++) {
    sx += dx[t] * dx[t]
    sy += dy[t] * dy[t]
  }
  const scale = Math.sqrt(sx) * Math.sqrt(sy)
  const out = new Float64Array(2 * maxLag + 1)
  for (let k = 0; k <= maxLag; k++) {
    out[maxLag + k] = scale > 0 ? later[k] / scale : NaN
    out[maxLag - k] = scale > 0 ? earlier[k] / scale : NaN
  }
  return out
}
