import type { AutoregressiveModel, OrderChoice } from './autoregressiveModel'
import { autocovariance } from './autocovariance'
import { mean } from './mean'
import { orderByAic } from './orderByAic'
import { requireOrder } from './requireOrder'

/**
 * Autoregressive model by Yule-Walker: biased autocovariances, Levinson-Durbin recursion.
 *
 * Always stable, but biased on a lightly damped loop (10 % in the variance ratio): the benchmark uses least squares or
 * Burg. `innovationVariance` is c_0 - sum phi_k c_k; R's var.pred is that times n / (n - order - 1).
 *
 * @param x length n >= 2, finite
 * @param choice order, or maxOrder (Akaike, n log(variance) + 2 order, as R's ar.yw), 0..n-1
 * @returns the model; for a constant record order 0 and variance 0
 * @throws RangeError on values that are not finite or an order outside the range
 * Source: J. Durbin (1960) The fitting of time-series models, Revue de l'Institut International de Statistique
 * 28:233-244; R stats::ar.yw. Reference: fixtures/reference/autoregression.json. Cost O(n order + order^2).
 */
export function autoregressiveYuleWalker(x: Float64Array, choice: OrderChoice): AutoregressiveModel {
  const n = x.length
  if (n < 2) throw new RangeError(`an autoregressive model needs at least 2 samples, got ${n}`)
  const maxOrder = requireOrder(choice, n - 1)
  const c = autocovariance(x, maxOrder)
  const models: Float64Array[] = [new Float64Array(0)]
  const variances = new Float64Array(maxOrder + 1)
  variances[0] = c[0]
  for (let m = 1; m <= maxOrder && variances[m - 1] > 0; m++) {
    const previous = models[m - 1]
    let k = c[m]
    for (let j = 1; j < m; j++) k -= previous[j - 1] * c[m - j]
    k /= variances[m - 1]
    models.push(reflect(previous, k))
    variances[m] = variances[m - 1] * (1 - k * k)
  }
  const chosen = 'order' in choice ? null : orderByAic(variances, n)
  // a constant record has nothing to predict: order 0 says so
  const order = Math.min(models.length - 1, chosen ? Math.max(0, chosen.order) : maxOrder)
  return { order, coefficients: models[order], innovationVariance: variances[order], mean: mean(x), samples: n, aicAboveMinimum: chosen && chosen.aboveMinimum }
}

/** Coefficients of order m from those of order m - 1 and the reflection coefficient. */
function reflect(previous: Float64Array, k: number): Float64Array {
  const m = previous.length + 1
  const next = new Float64Array(m)
  for (let j = 0; j < m - 1; j++) next[j] = previous[j] - k * previous[m - 2 - j]
  next[m - 1] = k
  return next
}
