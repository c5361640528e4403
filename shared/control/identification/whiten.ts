/** Autoregressive noise model v + a1 v(-1) + ... = e: coefficients without the leading 1. */
export interface NoiseModel { a: Float64Array }

/**
 * Passes a signal through A(q), the inverse of its noise model.
 * @param x evenly spaced
 * @returns same length; the first `a.length` values are 0, because their past is unknown
 * Source: L. Ljung (1999) System Identification, 2nd ed., 3.2.
 */
export function whiten(x: Float64Array, { a }: NoiseModel): Float64Array {
  const p = a.length
  if (p === 0) return x
  const out = new Float64Array(x.length)
  for (let k = p; k < x.length; k++) {
    let sum = x[k]
    for (let i = 0; i < p; i++) sum += a[i] * x[k - 1 - i]
    out[k] = sum
  }
  return out
}
