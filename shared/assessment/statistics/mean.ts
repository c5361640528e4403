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
  let sum = 0
  for (let i = 0; i < n; i++) sum += x[i]
  const first = sum / n
  let rest = 0
  for (let i = 0; i < n; i++) rest += x[i] - first
  return first + rest / n
}
