import { zeroCrossings } from './zeroCrossings'

export interface Regularity {
  /** r: > 1 is a regular oscillation; NaN below 3 crossings, Infinity for equal intervals */
  regularity: number
  /** twice the mean interval, in samples; NaN below 3 crossings */
  period: number
  /** standard deviation of that period from interval to interval (2 x sd of the intervals), samples */
  periodSd: number
  /** intervals used, at most 10 */
  intervals: number
}

/**
 * Regularity of an oscillation from the zero crossings of the autocorrelation: r = mean / (3 sd) of the intervals between
 * the first 11 crossings (the stretch from lag 0 to the first crossing is not used), sd with n - 1.
 * On a signal with two oscillations the period means nothing: band-pass first. O(lags).
 * @param autocorrelation from lag 0 on, any positive scale
 * Source: Thornhill, Huang, Zhang 2003, "Detection of multiple oscillations in control loops".
 * Fixture: fixtures/reference/oscillation.json.
 */
export function regularity(autocorrelation: Float64Array): Regularity {
  const crossings = zeroCrossings(autocorrelation, 11)
  const intervals = Math.max(0, crossings.length - 1)
  if (intervals < 2) return { regularity: Number.NaN, period: Number.NaN, periodSd: Number.NaN, intervals }
  const mean = (crossings[intervals] - crossings[0]) / intervals
  let squares = 0
  for (let i = 0; i < intervals; i++) squares += (crossings[i + 1] - crossings[i] - mean) ** 2
  const sd = Math.sqrt(squares / (intervals - 1))
  return { regularity: sd > 0 ? mean / sd / 3 : Number.POSITIVE_INFINITY, period: 2 * mean, periodSd: 2 * sd, intervals }
}
