import { autocorrelation } from '../statistics/autocorrelation'
import { insufficient, type Insufficient } from '../types'

export interface ErrorDecay {
  /** s until the autocorrelation of the error first falls below 1 / e */
  decayTimeS: number
  /** that over the settling horizon: about a quarter (four time constants settle to 2 %) as it should be, above 1 sluggish */
  ratio: number
  /** autocorrelation one settling horizon on: near 0 as it should be */
  atHorizon: number
}

/**
 * How long the control error remembers: first lag at which its autocorrelation is below 1 / e, against the settling horizon.
 *
 * Domain: normal mode, no detected oscillation, at least ten horizons of data (a short record makes every decay look quick,
 * because its mean is taken off).
 * @param error control error, finite (bridged), length n
 * @param options sampleIntervalS > 0, settlingS > 0
 * Source: definition (correlation time); the reading against the horizon is ours. O(n log n).
 */
export function errorDecay(error: Float64Array, { sampleIntervalS, settlingS }: { sampleIntervalS: number, settlingS: number }): ErrorDecay | Insufficient {
  if (!(sampleIntervalS > 0)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  if (!(settlingS > 0)) throw new RangeError(`settlingS must be above 0, got ${settlingS}`)
  const horizon = Math.max(1, Math.round(settlingS / sampleIntervalS))
  if (error.length < 10 * horizon || error.length < 20) return insufficient('fewer than ten settling horizons of data')
  const r = autocorrelation(error, Math.min(error.length - 1, 4 * horizon))
  if (Number.isNaN(r[0])) return insufficient('the error stands still')
  const limit = Math.exp(-1)
  let lag = 1
  while (lag < r.length && r[lag] > limit) lag++
  const exact = lag < r.length ? lag - 1 + (r[lag - 1] - limit) / (r[lag - 1] - r[lag]) : lag
  return { decayTimeS: exact * sampleIntervalS, ratio: exact * sampleIntervalS / settlingS, atHorizon: r[horizon] }
}
