/**
 * The order with the smallest Akaike criterion n log(variance) + 2 order, among those that could be fitted.
 *
 * @param variances residual variance at order 0..maxOrder; an order whose variance is not positive (perfectly
 *   predictable record, singular equations) is no candidate
 * @param samples n of the criterion
 * @returns the smallest best order, or -1 when no order can be used; the criterion above its minimum, NaN where unusable
 * Source: H. Akaike (1974) A new look at the statistical model identification, IEEE Trans. Automatic Control 19:716-723;
 * constants as in R stats::ar. Reference: fixtures/reference/autoregression.json (aic_minus_min).
 */
export function orderByAic(variances: Float64Array, samples: number): { order: number, aboveMinimum: Float64Array } {
  const aboveMinimum = new Float64Array(variances.length)
  let order = -1
  let least = Infinity
  for (let m = 0; m < variances.length; m++) {
    aboveMinimum[m] = variances[m] > 0 ? samples * Math.log(variances[m]) + 2 * m : NaN
    if (aboveMinimum[m] < least) {
      least = aboveMinimum[m]
      order = m
    }
  }
  for (let m = 0; m < variances.length; m++) aboveMinimum[m] -= least
  return { order, aboveMinimum }
}
