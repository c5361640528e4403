import type { AutoregressiveModel, OrderChoice } from './autoregressiveModel'
import { deviations } from './deviations'
import { mean } from './mean'
import { orderByAic } from './orderByAic'
import { requireOrder } from './requireOrder'
import { workingMemory } from './workingMemory'

/** A pivot this small against its diagonal element: the lags are linearly dependent to rounding. */
const SINGULAR = 1e-12

/**
 * Autoregressive model by least squares (covariance method): minimises the squared one-step errors at t = order .. n-1.
 *
 * The mean is removed, no intercept. `innovationVariance` is RSS / (n - order). The normal equations come from lagged
 * products and are solved by Cholesky; going from the largest order down, each smaller order gets the samples back that
 * it can predict and the larger one cannot, as in R's ar.ols. Unlike Yule-Walker and Burg the model may be unstable.
 *
 * @param x length n >= 2, finite
 * @param choice order, or maxOrder (Akaike with n log(variance) + 2 order, as R's ar.ols), 0..floor((n-1)/2)
 * @returns the model; a given order that the record does not determine (constant, or perfectly predictable by fewer
 *   lags) gives NaN coefficients and variance; with maxOrder such orders are no candidates (a constant record gives order 0)
 * @throws RangeError on values that are not finite or an order outside the range
 * Source: definition (least squares); R stats::ar.ols(demean = TRUE, intercept = FALSE).
 * Reference: fixtures/reference/autoregression.json (ar_ols_noint, fixed_orders) and harris.json.
 * Cost O(n order + order^4).
 */
export function autoregressiveLeastSquares(x: Float64Array, choice: OrderChoice): AutoregressiveModel {
  const n = x.length
  if (n < 2) throw new RangeError(`an autoregressive model needs at least 2 samples, got ${n}`)
  const maxOrder = requireOrder(choice, Math.floor((n - 1) / 2))
  const d = deviations(x, 'x', workingMemory(n))
  const size = maxOrder + 1
  const products = lagMatrix(d, maxOrder)

  const variances = new Float64Array(size)
  const models: (Float64Array | null)[] = new Array(size).fill(null)
  const lowest = 'order' in choice ? maxOrder : 0
  for (let m = maxOrder; m >= lowest; m--) {
    if (m < maxOrder) {
      // order m also predicts d_m, which order m + 1 could not
      for (let i = 0; i <= m; i++) for (let j = 0; j <= i; j++) products[i * size + j] += d[m - i] * d[m - j]
    }
    const solved = solve(products, size, m)
    models[m] = solved && solved.coefficients
    variances[m] = solved ? solved.squares / (n - m) : NaN
  }
  const chosen = 'order' in choice ? null : orderByAic(variances, n)
  const order = chosen ? Math.max(0, chosen.order) : maxOrder
  return {
    order,
    coefficients: models[order] ?? new Float64Array(order).fill(NaN),
    innovationVariance: variances[order],
    mean: mean(x),
    samples: n,
    aicAboveMinimum: chosen && chosen.aboveMinimum,
  }
}

/** sum_{t=p}^{n-1} d_(t-i) d_(t-j), lower triangle, row length p + 1. */
function lagMatrix(d: Float64Array, p: number): Float64Array {
  const n = d.length
  const size = p + 1
  const c = new Float64Array(size * size)
  // four lags in one pass: each sample is loaded once for all of them
  let i = 0
  for (; i + 3 <= p; i += 4) {
    let s0 = 0, s1 = 0, s2 = 0, s3 = 0
    let b = d[p - i - 1], e = d[p - i - 2], f = d[p - i - 3]
    for (let t = p, k = p - i; t < n; t++, k++) {
      const x = d[t], a = d[k]
      s0 += x * a
      s1 += x * b
      s2 += x * e
      s3 += x * f
      f = e
      e = b
      b = a
    }
    c[i * size] = s0
    c[(i + 1) * size] = s1
    c[(i + 2) * size] = s2
    c[(i + 3) * size] = s3
  }
  for (; i <= p; i++) {
    let s0 = 0
    for (let t = p; t < n; t++) s0 += d[t] * d[t - i]
    c[i * size] = s0
  }
  // the next diagonal element sees the same products, one sample earlier
  for (let j = 1; j <= p; j++) {
    for (let i = j; i <= p; i++) {
      c[i * size + j] = c[(i - 1) * size + j - 1] + d[p - i] * d[p - j] - d[n - i] * d[n - j]
    }
  }
  return c
}

/** Solves order m from the leading part of the lag matrix; null when singular. */
function solve(c: Float64Array, size: number, m: number): { coefficients: Float64Array, squares: number } | null {
  const l = new Float64Array(m * m)
  const y = new Float64Array(m)
  let squares = c[0]
  for (let i = 0; i < m; i++) {
    for (let j = 0; j <= i; j++) {
      let s = c[(i + 1) * size + j + 1]
      for (let k = 0; k < j; k++) s -= l[i * m + k] * l[j * m + k]
      if (i === j) {
        if (!(s > SINGULAR * c[(i + 1) * size + i + 1])) return null
        l[i * m + i] = Math.sqrt(s)
      } else {
        l[i * m + j] = s / l[j * m + j]
      }
    }
    let s = c[(i + 1) * size]
    for (let k = 0; k < i; k++) s -= l[i * m + k] * y[k]
    y[i] = s / l[i * m + i]
    squares -= y[i] * y[i]
  }
  // what is left of the squares is rounding, not a residual
  if (squares < SINGULAR * c[0]) return null
  const coefficients = new Float64Array(m)
  for (let i = m - 1; i >= 0; i--) {
    let s = y[i]
    for (let k = i + 1; k < m; k++) s -= l[k * m + i] * coefficients[k]
    coefficients[i] = s / l[i * m + i]
  }
  return { coefficients, squares }
}
