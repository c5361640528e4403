import type { AutoregressiveModel, OrderChoice } from '../statistics/autoregressiveModel'
import { autoregressiveBurg } from '../statistics/autoregressiveBurg'
import { autoregressiveCorrelation } from '../statistics/autoregressiveCorrelation'
import { autoregressiveLeastSquares } from '../statistics/autoregressiveLeastSquares'
import { requireFinite } from '../statistics/requireFinite'
import { variance } from '../statistics/variance'

export type BenchmarkEstimator = 'leastSquares' | 'burg'

export interface SegmentModel {
  samples: number
  model: AutoregressiveModel
  /** 'burg' as well where least squares gave an unstable model */
  estimator: BenchmarkEstimator
  /** mean square about the segment's mean */
  variance: number
  /** autocorrelation of the fitted process, until it has died out */
  correlation: Float64Array
}

/** At least this many samples for each fitted coefficient, ours; AIC alone overfits short segments. */
const SAMPLES_PER_COEFFICIENT = 10

/**
 * Autoregressive model of one segment for the variance benchmark; null when the segment does not carry one.
 *
 * Least squares may end in an unstable model on short or lightly damped segments; Burg's cannot, so it steps in.
 *
 * @param x length n, finite
 * @param estimator preferred estimator
 * @param choice order or largest order; cut to n / 10
 * @returns null for fewer than 20 samples, a constant segment, or one that predicts itself without error
 * @throws RangeError on a value that is not finite
 * Source: as varianceBenchmark. Reference: fixtures/reference/harris.json through varianceBenchmark.
 */
export function segmentModel(x: Float64Array, estimator: BenchmarkEstimator, choice: OrderChoice): SegmentModel | null {
  requireFinite(x, 'segment')
  const n = x.length
  const most = Math.floor(n / SAMPLES_PER_COEFFICIENT)
  if (most < 2) return null
  const limited: OrderChoice = 'order' in choice ? { order: Math.min(choice.order, most) } : { maxOrder: Math.min(choice.maxOrder, most) }
  const squares = variance(x, 0)
  if (!(squares > 0)) return null
  for (const tried of estimator === 'burg' ? ['burg'] as const : ['leastSquares', 'burg'] as const) {
    const model = tried === 'burg' ? autoregressiveBurg(x, limited) : autoregressiveLeastSquares(x, limited)
    if (!(model.innovationVariance > 1e-12 * squares)) continue
    const correlation = autoregressiveCorrelation(model.coefficients, n - 1)
    if (correlation) return { samples: n, model, estimator: tried, variance: squares, correlation }
  }
  return null
}
