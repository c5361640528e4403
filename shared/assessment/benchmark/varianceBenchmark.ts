import { insufficient, type Insufficient } from '../types'
import type { OrderChoice } from '../statistics/autoregressiveModel'
import { impulseResponse } from '../statistics/impulseResponse'
import { segmentModel, type BenchmarkEstimator, type SegmentModel } from './segmentModel'

/** Where the delay comes from: the loop's set-up, an estimate from data, or the horizon of the loop's type (our default). */
export type DelaySource = 'known' | 'estimated' | 'horizon'

export interface VarianceBenchmark {
  status: 'ok'
  /** minimum variance / variance, in (0, 1]; 1: minimum variance */
  ratio: number
  /** limits of the 95 % interval; null where none is given */
  low: number | null
  high: number | null
  /** why there is no interval */
  intervalWithheld: string | null
  /** asymptotic standard deviation of the ratio; tends to 0 at ratio 1, where it says nothing */
  standardDeviation: number
  /** 1 - ratio: the share of the variance that feedback could remove */
  headroom: number
  /** pooled, square of the unit of y; minimumVariance / variance may exceed 1 by chance, `ratio` does not */
  minimumVariance: number
  variance: number
  delaySamples: number
  delaySource: DelaySource
  /** samples in the segments used */
  samples: number
  segments: { samples: number, order: number, estimator: BenchmarkEstimator, ratio: number }[]
  /** segments left out: too short, constant or predictable without error */
  segmentsLeftOut: number
  /** the fitted models, for ratioByHorizon */
  models: SegmentModel[]
}

/** Above this ratio the asymptotic interval covers the true value in a third to a half of the cases only (measured). */
const NO_INTERVAL_ABOVE = 0.95
/** Fewest samples, from 150 up in the literature (Desborough, Harris 1992, from memory). */
const FEWEST_SAMPLES = 150
/** and at least so many delays */
const FEWEST_DELAYS = 10

/**
 * Minimum-variance ratio of a loop from closed-loop data: the variance that the best feedback could not remove within
 * the dead time, over the variance there is.
 *
 * Each segment's control error (or PV) is modelled as autoregressive, y_t = sum psi_i a_(t-i); feedback cannot touch
 * psi_0..psi_(b-1), so minimumVariance = var(a) sum_{i<b} psi_i^2. Segments are pooled: the sums of minimum variance and
 * of variance, each weighted by its samples, are divided. Variance is about each segment's mean: a lasting offset does
 * not count here, it is a measure of its own. Desborough and Harris' own index is 1 - ratio.
 *
 * 95 % interval: var(ratio) = (4/n) ratio^2 [sum_{k=1}^{b-1} (rho_k - rho_e,k)^2 + sum_{k>=b} rho_k^2], rho the
 * autocorrelation of y and rho_e that of the b-step prediction error, both from the fitted model; taken on the
 * logarithm, so that it stays positive, and cut at 1. The published expression was known from memory; the one used was
 * derived again by the delta method (Gaussian innovations) and checked by simulation.
 *
 * @param segments regular samples of one interval, each finite; pieces of one loop in normal mode
 * @param options delaySamples b, integer >= 1, the hold's sample included (see delaySamples); delaySource;
 *   estimator, least squares by default; choice of the order, Akaike up to 30 by default, never above samples / 10
 * @returns the benchmark, or insufficient with the reason
 * @throws RangeError on a delay that is no integer >= 1, or a value that is not finite
 * Source: T. J. Harris (1989) Assessment of control loop performance, Can. J. Chem. Eng. 67:856-861; L. Desborough,
 * T. Harris (1992) Performance assessment measures for univariate feedback control, Can. J. Chem. Eng. 70:1186-1197.
 * Reference: fixtures/reference/harris.json. Cost O(n order + order^4).
 */
export function varianceBenchmark(
  segments: readonly Float64Array[],
  options: { delaySamples: number, delaySource: DelaySource, estimator?: BenchmarkEstimator, choice?: OrderChoice },
): VarianceBenchmark | Insufficient {
  const { delaySamples: b, delaySource, estimator = 'leastSquares', choice = { maxOrder: 30 } } = options
  if (!Number.isInteger(b) || b < 1) throw new RangeError(`delaySamples must be an integer of at least 1 (the hold's sample), got ${b}`)
  const fitted: SegmentModel[] = []
  for (const segment of segments) {
    const model = segmentModel(segment, estimator, choice)
    if (model) fitted.push(model)
  }
  const samples = fitted.reduce((n, s) => n + s.samples, 0)
  const wanted = Math.max(FEWEST_SAMPLES, FEWEST_DELAYS * b)
  if (samples < wanted) {
    const given = segments.reduce((n, s) => n + s.length, 0)
    return insufficient(given < wanted
      ? `${given} samples, at least ${wanted} are needed for a delay of ${b} samples`
      : `${samples} of ${given} samples are in segments that carry a model (long enough, changing, not perfectly predictable); at least ${wanted} are needed`)
  }

  let minimumVariance = 0
  let variance = 0
  const perSegment = fitted.map((s) => {
    const psi = impulseResponse(s.model.coefficients, b)
    let squares = 0
    for (const p of psi) squares += p * p
    const least = s.model.innovationVariance * squares
    minimumVariance += s.samples * least
    variance += s.samples * s.variance
    return { fit: s, psi, squares, ratio: least / s.variance }
  })
  const ratio = Math.min(1, minimumVariance / variance)
  // pooled ratio = mean of the segments' ratios weighted by samples times variance
  let uncertainty = 0
  for (const { fit, psi, squares, ratio: own } of perSegment) {
    const weight = fit.samples * fit.variance / variance
    uncertainty += weight * weight * 4 * own * own * correlationGap(fit.correlation, psi, squares) / fit.samples
  }
  const standardDeviation = Math.sqrt(uncertainty)
  const withheld = ratio > NO_INTERVAL_ABOVE
  const factor = Math.exp(1.959963984540054 * standardDeviation / ratio)
  return {
    status: 'ok',
    ratio,
    low: withheld ? null : ratio / factor,
    high: withheld ? null : Math.min(1, ratio * factor),
    intervalWithheld: withheld ? `above ${NO_INTERVAL_ABOVE} the asymptotic interval misses the true value too often` : null,
    standardDeviation,
    headroom: 1 - ratio,
    minimumVariance: minimumVariance / samples,
    variance: variance / samples,
    delaySamples: b,
    delaySource,
    samples,
    segments: perSegment.map(({ fit, ratio: own }) => ({ samples: fit.samples, order: fit.model.order, estimator: fit.estimator, ratio: Math.min(1, own) })),
    segmentsLeftOut: segments.length - fitted.length,
    models: fitted,
  }
}

/** sum_{k=1}^{b-1} (rho_k - rho_e,k)^2 + sum_{k>=b} rho_k^2 */
function correlationGap(rho: Float64Array, psi: Float64Array, squares: number): number {
  const b = psi.length
  let sum = 0
  for (let k = 1; k < Math.max(b, rho.length); k++) {
    let own = 0
    for (let i = 0; i + k < b; i++) own += psi[i] * psi[i + k]
    const gap = (k < rho.length ? rho[k] : 0) - own / squares
    sum += gap * gap
  }
  return sum
}
