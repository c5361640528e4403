import { insufficient, type Insufficient } from '../types'
import type { OrderChoice } from '../statistics/autoregressiveModel'
import { impulseResponse } from '../statistics/impulseResponse'
import { segmentModel, type BenchmarkEstimator, type SegmentModel } from './segmentModel'

/**
 * Minimum-variance ratio as a function of the assumed delay: shows how much of the verdict hangs on the dead time.
 *
 * Non-decreasing from var(a)/var(y) at 1 sample towards 1; the extended horizon index of the literature is the same
 * figure read at a horizon beyond the dead time.
 *
 * @param segments as for varianceBenchmark, finite
 * @param options longestSamples: largest delay, integer >= 1; estimator and choice as for varianceBenchmark; models: fitted already, then segments are not looked at
 * @returns ratio[b - 1] for b = 1..longestSamples, in (0, 1]; or insufficient when no segment carries a model
 * @throws RangeError on a horizon that is no integer >= 1 or a value that is not finite
 * Source: Desborough, Harris (1992), as varianceBenchmark; N. F. Thornhill, M. Oettinger, P. Fedenczuk (1999)
 * Refinery-wide control loop performance assessment, J. Process Control 9:109-124 (extended horizon).
 * Reference: fixtures/reference/harris.json (b = 1, 2, 5). Cost O(n order + order^4).
 */
export function ratioByHorizon(
  segments: readonly Float64Array[],
  options: { longestSamples: number, estimator?: BenchmarkEstimator, choice?: OrderChoice, models?: readonly SegmentModel[] },
): { status: 'ok', ratio: Float64Array } | Insufficient {
  const { longestSamples, estimator = 'leastSquares', choice = { maxOrder: 30 } } = options
  if (!Number.isInteger(longestSamples) || longestSamples < 1) throw new RangeError(`longestSamples must be an integer of at least 1, got ${longestSamples}`)
  const fitted = options.models ?? segments.map(s => segmentModel(s, estimator, choice)).filter((s): s is SegmentModel => s !== null)
  if (fitted.length === 0) return insufficient('no segment carries a model: too short, constant or perfectly predictable')
  const ratio = new Float64Array(longestSamples)
  let variance = 0
  for (const { samples, model, variance: own } of fitted) {
    variance += samples * own
    const psi = impulseResponse(model.coefficients, longestSamples)
    let sum = 0
    for (let i = 0; i < longestSamples; i++) {
      sum += psi[i] * psi[i]
      ratio[i] += samples * model.innovationVariance * sum
    }
  }
  for (let i = 0; i < longestSamples; i++) ratio[i] = Math.min(1, ratio[i] / variance)
  return { status: 'ok', ratio }
}
