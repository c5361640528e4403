/**
 * Error measures of one loop-week: time-weighted, since every slot of the native grid stands for one interval.
 *
 * In normal mode: mean absolute error (which is the IAE per hour in unit x h per h), mean error (offset), standard
 * deviation of PV about its mean (divisor N). Over all usable time: share with |SP - PV| within the tolerance.
 * Nothing is bridged or filled. Two passes, O(n). Source: definitions.
 *
 * @param prepared native record; frozen and missing samples do not count
 * @param tolerance half width of the band, PV unit, >= 0
 * @returns NaN where no sample counts
 */
import { FROZEN, OFF_NORMAL, type PreparedRecord } from '../preparation/prepareRecord'

export interface ErrorMeasures {
  meanAbsoluteError: number
  offset: number
  standardDeviation: number
  pvMean: number
  timeInTolerance: number
  /** samples in normal mode with SP and PV */
  errorSamples: number
  /** samples in normal mode with PV */
  pvSamples: number
  /** samples with SP and PV in any mode */
  anySamples: number
}

export function errorMeasures(prepared: PreparedRecord, tolerance: number): ErrorMeasures {
  if (!(tolerance >= 0)) throw new RangeError(`errorMeasures: tolerance must be 0 or more, got ${tolerance}`)
  const { n, pv, error, flags } = prepared
  let errorSamples = 0
  let pvSamples = 0
  let anySamples = 0
  let within = 0
  let sumAbs = 0
  let sum = 0
  let sumPv = 0
  // a band of 5 units holds an error of exactly 5 that the historian wrote as 55.0000001 - 50
  const band = tolerance * (1 + 1e-9)
  for (let i = 0; i < n; i++) {
    const x = pv[i]
    if (x !== x || (flags[i] & FROZEN) !== 0) continue
    const normal = (flags[i] & OFF_NORMAL) === 0
    if (normal) {
      pvSamples++
      sumPv += x
    }
    if (!error) continue
    const e = error[i]
    if (e !== e) continue
    const a = Math.abs(e)
    anySamples++
    if (a <= band) within++
    if (normal) {
      errorSamples++
      sumAbs += a
      sum += e
    }
  }
  const pvMean = pvSamples > 0 ? sumPv / pvSamples : NaN
  let squares = 0
  for (let i = 0; i < n; i++) {
    const d = pv[i] - pvMean
    if (d === d && (flags[i] & (FROZEN | OFF_NORMAL)) === 0) squares += d * d
  }
  return {
    meanAbsoluteError: errorSamples > 0 ? sumAbs / errorSamples : NaN,
    offset: errorSamples > 0 ? sum / errorSamples : NaN,
    standardDeviation: pvSamples > 1 ? Math.sqrt(squares / pvSamples) : NaN,
    pvMean,
    timeInTolerance: anySamples > 0 ? within / anySamples : NaN,
    errorSamples,
    pvSamples,
    anySamples,
  }
}
