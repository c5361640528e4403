import { autoregressiveLeastSquares } from '../statistics/autoregressiveLeastSquares'
import { insufficient, type Insufficient } from '../types'
import { averageDown } from './averageDown'

export interface ResonanceFeatures {
  /** damping of the pole pair nearest the peak: 0 an undamped line, about 0.05 to 0.25 a loop tuned too tight */
  damping: number
  /** period of that pair, samples */
  periodSamples: number
  order: number
}

/** Samples to a period to which the record is averaged down: an order of 20 then spans more than a cycle. */
const PER_PERIOD = 12
const MOST_ORDER = 24
const FEWEST_SAMPLES = 120

/**
 * Damping of the loop at its oscillation, from the poles of an autoregressive model of the error: noise through a closed
 * loop shows the loop's own poles.
 *
 * Domain: detected oscillation, at least 120 samples after averaging down to 12 to the period. On a limit cycle or a line
 * the damping comes out near 0 and says nothing about the tuning: read it together with lineWidth and harmonics.
 * @param error finite, length n
 * @param periodSamples samples, >= 4
 * Source: poles of an autoregressive model, least squares, order by AIC (Akaike 1974). Checked on resonances of known damping.
 */
export function resonanceFeatures(error: Float64Array, periodSamples: number): ResonanceFeatures | Insufficient {
  if (!(periodSamples >= 4)) throw new RangeError(`periodSamples must be at least 4, got ${periodSamples}`)
  const factor = Math.max(1, Math.floor(periodSamples / PER_PERIOD))
  const x = averageDown(error, factor)
  if (x.length < FEWEST_SAMPLES) return insufficient(`${x.length} samples after averaging down, ${FEWEST_SAMPLES} are needed`)
  const { coefficients, order } = autoregressiveLeastSquares(x, { maxOrder: Math.min(MOST_ORDER, Math.floor(x.length / 8)) })
  if (order < 2 || !coefficients.every(Number.isFinite)) return insufficient('no autoregressive model fits')
  let best: ResonanceFeatures | null = null, nearest = Infinity
  for (const [re, im] of roots(coefficients)) {
    if (im <= 1e-9) continue
    const decay = -Math.log(Math.hypot(re, im)), angle = Math.atan2(im, re)
    const damping = decay / Math.hypot(decay, angle)
    const period = 2 * Math.PI / angle * factor
    const distance = Math.abs(Math.log(period / periodSamples))
    // Among those within a fifth the least damped one makes the peak.
    const rank = distance < 0.2 ? damping - 1 : distance
    if (rank < nearest) { nearest = rank; best = { damping, periodSamples: period, order } }
  }
  if (!best || Math.abs(Math.log(best.periodSamples / periodSamples)) > 0.4) return insufficient('no pole pair near the period')
  return best
}

/** Roots z of z^p - a1 z^(p-1) - … - ap by simultaneous iteration (Durand, Kerner). */
function roots(a: Float64Array): [number, number][] {
  const p = a.length
  const re = new Float64Array(p), im = new Float64Array(p)
  for (let i = 0; i < p; i++) { re[i] = 0.95 * Math.cos(2 * Math.PI * i / p + 0.4); im[i] = 0.95 * Math.sin(2 * Math.PI * i / p + 0.4) }
  for (let round = 0; round < 200; round++) {
    let change = 0
    for (let i = 0; i < p; i++) {
      let nr = 1, ni = 0, dr = 1, di = 0
      for (let k = 0; k < p; k++) [nr, ni] = [nr * re[i] - ni * im[i] - a[k], nr * im[i] + ni * re[i]]
      for (let j = 0; j < p; j++) if (j !== i) [dr, di] = [dr * (re[i] - re[j]) - di * (im[i] - im[j]), dr * (im[i] - im[j]) + di * (re[i] - re[j])]
      const d = dr * dr + di * di
      if (!(d > 0)) continue
      const sr = (nr * dr + ni * di) / d, si = (ni * dr - nr * di) / d
      re[i] -= sr
      im[i] -= si
      change = Math.max(change, Math.abs(sr) + Math.abs(si))
    }
    if (change < 1e-12) break
  }
  return Array.from(re, (r, i) => [r, im[i]])
}
