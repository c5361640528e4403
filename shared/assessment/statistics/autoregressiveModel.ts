/** An autoregressive model of the mean-removed record: d_t = sum_j coefficients[j-1] d_(t-j) + a_t. */
export interface AutoregressiveModel {
  order: number
  /** phi_1..phi_order, sign as in the equation above */
  coefficients: Float64Array
  /** variance of a_t, square of the unit of x; divisor as the estimator documents */
  innovationVariance: number
  /** mean that was removed, unit of x */
  mean: number
  /** number of samples */
  samples: number
  /** Akaike's criterion at order 0..maxOrder less its minimum; NaN where an order could not be fitted; null for a given order */
  aicAboveMinimum: Float64Array | null
}

/** Give the order, or the largest order from which Akaike's criterion chooses. */
export type OrderChoice = { order: number } | { maxOrder: number }
