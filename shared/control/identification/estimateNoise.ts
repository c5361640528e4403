import { solveSymmetric } from './solveSymmetric'
import type { NoiseModel } from './whiten'

/**
 * Autoregressive noise model by least squares over all stretches, order by Akaike's criterion.
 * @param signals one per stretch, evenly spaced, mean 0
 * @param largest order tried
 * @returns the model and the mean square of the whitened signals (the first `largest` samples of each left out)
 * Source: H. Akaike (1974), IEEE Trans. Automatic Control 19:716-723.
 */
export function estimateNoise(signals: readonly Float64Array[], largest: number): { noise: NoiseModel, variance: number } {
  const n = largest
  const moments = new Float64Array((n + 1) * (n + 1))
  let samples = 0
  for (const v of signals) {
    for (let k = n; k < v.length; k++) {
      samples++
      for (let i = 0; i <= n; i++) for (let j = 0; j <= i; j++) moments[i * (n + 1) + j] += v[k - i] * v[k - j]
    }
  }
  let best: { noise: NoiseModel, variance: number } = { noise: { a: new Float64Array(0) }, variance: moments[0] / samples }
  let bestCriterion = samples * Math.log(best.variance)
  for (let p = 1; p <= n; p++) {
    const a = new Float64Array(p * p)
    const b = new Float64Array(p)
    for (let i = 0; i < p; i++) {
      b[i] = -moments[(i + 1) * (n + 1)]
      for (let j = 0; j < p; j++) a[i * p + j] = moments[(Math.max(i, j) + 1) * (n + 1) + Math.min(i, j) + 1]
    }
    const coefficients = solveSymmetric(a, b, 1e-10)?.x
    if (!coefficients) break
    let left = moments[0]
    for (let i = 0; i < p; i++) left -= coefficients[i] * b[i]
    const variance = Math.max(left / samples, 1e-300)
    const criterion = samples * Math.log(variance) + 2 * p
    if (criterion < bestCriterion) {
      bestCriterion = criterion
      best = { noise: { a: coefficients }, variance }
    }
  }
  return best
}

