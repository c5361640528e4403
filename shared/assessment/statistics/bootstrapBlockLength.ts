import { autocovariance } from './autocovariance'

/**
 * Mean block length for the stationary bootstrap of a mean, chosen from the record's own correlation.
 *
 * Flat-top lag window; bandwidth 2 m, m the first lag after which K_n correlations in a row are within
 * 2 sqrt(log10(n)/n); b = (2 G^2 / D)^(1/3) n^(1/3) with D = 2 g(0)^2 after the correction of 2009. Kept within 1 and
 * min(3 sqrt(n), n / 3), as the authors' own program is remembered to do (from memory).
 *
 * @param x length n >= 8, finite
 * @returns mean block length in samples, 1 for a constant record
 * @throws RangeError on fewer than 8 samples or a value that is not finite
 * Source: D. N. Politis, H. White (2004) Automatic block-length selection for the dependent bootstrap, Econometric
 * Reviews 23:53-70; A. Patton, D. N. Politis, H. White (2009) Correction, Econometric Reviews 28:372-375.
 * Reference: fixtures/reference/bootstrap.json; closed form for a first-order process. Cost O(n log n).
 */
export function bootstrapBlockLength(x: Float64Array): number {
  const n = x.length
  if (n < 8) throw new RangeError(`block length needs at least 8 samples, got ${n}`)
  const run = Math.max(5, Math.ceil(Math.sqrt(Math.log10(n))))
  const widest = Math.ceil(Math.sqrt(n)) + run
  const c = autocovariance(x, Math.min(n - 1, widest + run))
  if (!(c[0] > 0)) return 1
  const limit = 2 * Math.sqrt(Math.log10(n) / n) * c[0]
  let m = 0
  for (let quiet = 0, k = 1; quiet < run; k++) {
    // no run of small correlations: take all there is
    if (m >= widest || k >= c.length) {
      m = widest
      break
    }
    if (Math.abs(c[k]) < limit) {
      quiet++
    } else {
      quiet = 0
      m = k
    }
  }
  const bandwidth = Math.min(2 * Math.max(1, m), widest, n - 1)
  let g0 = c[0]
  let g = 0
  for (let k = 1; k <= bandwidth; k++) {
    const weight = 2 * k <= bandwidth ? 1 : 2 * (1 - k / bandwidth)
    g0 += 2 * weight * c[k]
    g += 2 * weight * k * c[k]
  }
  const length = Math.cbrt(g * g / (g0 * g0)) * Math.cbrt(n)
  const most = Math.ceil(Math.min(3 * Math.sqrt(n), n / 3))
  return Math.max(1, length < most ? length : most)
}
