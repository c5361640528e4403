/**
 * Arithmetic mean, corrected by the mean of the residuals (a second pass), so that a large offset costs no digits.
 *
 * @param x length >= 1, finite numbers (a NaN makes the result NaN)
 * @returns the mean, unit of x
 * @throws RangeError when x is empty
 * Source: definition; two-pass form: T. F. Chan, G. H. Golub, R. J. LeVeque (1983) Algorithms for computing the sample
 * variance, The American Statistician 37:242-247. Reference: fixtures/reference/nist.json. Cost O(n).
 */
export function mean(x: Float64Array): number {
  const n = x.length
  if (n === 0) throw new RangeError('mean needs at least 1 value, got 0')
  const first = sumLess(x, 0) / n
  return first + sumLess(x, first) / n
}

/** Sum of x - level; four partial sums, so that no addition waits for the one before it. */
function sumLess(x: Float64Array, level: number): number {
  const n = x.length
  let s0 = 0, s1 = 0, s2 = 0, s3 = 0
  let i = 0
  for (; i + 3 < n; i += 4) {
    s0 += x[i] - level
    s1 += x[i + 1] - level
    s2 += x[i + 2] - level
    s3 += x[i + 3] - level
  }
  for (; i < n; i++) s0 += x[i] - level
  return (s0 + s1) + (s2 + s3)
}
