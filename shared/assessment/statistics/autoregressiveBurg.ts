import type { AutoregressiveModel, OrderChoice } from './autoregressiveModel'
import { deviations } from './deviations'
import { mean } from './mean'
import { orderByAic } from './orderByAic'
import { requireOrder } from './requireOrder'

/**
 * Autoregressive model by Burg's method: each reflection coefficient minimises forward plus backward prediction error.
 *
 * Always stable and nearly unbiased for lightly damped records. `innovationVariance` is c_0 prod(1 - k^2), R's
 * ar.burg(var.method = 1).
 *
 * @param x length n >= 2, finite
 * @param choice order, or maxOrder (Akaike, as R's ar.burg), 0..n-1
 * @returns the model; for a constant record order 0 and variance 0
 * @throws RangeError on values that are not finite or an order outside the range
 * Source: J. P. Burg (1975) Maximum entropy spectral analysis, PhD thesis, Stanford; R stats::ar.burg.
 * Reference: fixtures/reference/autoregression.json. Cost O(n order).
 */
export function autoregressiveBurg(x: Float64Array, choice: OrderChoice): AutoregressiveModel {
  const n = x.length
  if (n < 2) throw new RangeError(`an autoregressive model needs at least 2 samples, got ${n}`)
  const maxOrder = requireOrder(choice, n - 1)
  const forward = deviations(x, 'x')
  const backward = forward.slice()
  const models: Float64Array[] = [new Float64Array(0)]
  const variances = new Float64Array(maxOrder + 1)
  let squares = 0
  for (let t = 0; t < n; t++) squares += forward[t] * forward[t]
  variances[0] = squares / n
  for (let m = 1; m <= maxOrder && variances[m - 1] > 0; m++) {
    let product = 0
    let power = 0
    for (let t = m; t < n; t++) {
      product += forward[t] * backward[t - 1]
      power += forward[t] * forward[t] + backward[t - 1] * backward[t - 1]
    }
    if (power === 0) break
    const k = 2 * product / power
    // from the end, so that backward[t - 1] is still that of the previous order
    for (let t = n - 1; t >= m; t--) {
      const f = forward[t]
      forward[t] = f - k * backward[t - 1]
      backward[t] = backward[t - 1] - k * f
    }
    const previous = models[m - 1]
    const next = new Float64Array(m)
    for (let j = 0; j < m - 1; j++) next[j] = previous[j] - k * previous[m - 2 - j]
    next[m - 1] = k
    models.push(next)
    variances[m] = Math.max(0, variances[m - 1] * (1 - k * k))
  }
  const chosen = 'order' in choice ? null : orderByAic(variances, n)
  const order = Math.min(models.length - 1, chosen ? Math.max(0, chosen.order) : maxOrder)
  return { order, coefficients: models[order], innovationVariance: variances[order], mean: mean(x), samples: n, aicAboveMinimum: chosen && chosen.aboveMinimum }
}
