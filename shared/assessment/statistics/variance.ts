import { mean } from './mean'

/**
 * Variance about the mean, two-pass with the residual-sum correction.
 *
 * @param x length > freedomLost, finite numbers (a NaN makes the result NaN)
 * @param freedomLost subtracted from n in the divisor: 1 sample variance (default), 0 mean square about the mean
 * @returns variance >= 0, square of the unit of x
 * @throws RangeError when x is too short for the divisor
 * Source: Chan, Golub, LeVeque (1983) Algorithms for computing the sample variance, The American Statistician
 * 37:242-247, eq. 1.7. Reference: fixtures/reference/nist.json. Cost O(n).
 */
export function variance(x: Float64Array, freedomLost: 0 | 1 = 1): number {
  const n = x.length
  if (n <= freedomLost) throw new RangeError(`variance with divisor n - ${freedomLost} needs more than ${freedomLost} values, got ${n}`)
  const m = mean(x)
  // two partial sums each, so that no addition waits for the one before it
  let squares = 0, rest = 0, oddSquares = 0, oddRest = 0
  let i = 0
  for (; i + 1 < n; i += 2) {
    const d = x[i] - m, e = x[i + 1] - m
    squares += d * d
    rest += d
    oddSquares += e * e
    oddRest += e
  }
  if (i < n) {
    const d = x[i] - m
    squares += d * d
    rest += d
  }
  squares += oddSquares
  rest += oddRest
  return Math.max(0, squares - rest * rest / n) / (n - freedomLost)
}
