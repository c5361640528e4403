/**
 * A swing so quick that the record shows fewer than about four samples of each cycle: the detector needs four, so it is looked
 * for here, only to say that the record is sampled too slowly.
 *
 * Largest share of the spectrum (Welch, 64 samples) in five neighbouring bins above 0.22 cycles a sample; white noise
 * gives 5 / 32. Cost O(n). Source: ours.
 *
 * @param x finite, length n
 * @returns share 0..1 and period in samples; null below 256 samples
 */
import { welchSpectrum } from '../spectrum/welchSpectrum'

export function fastSwing(x: Float64Array): { share: number, period: number } | null {
  if (x.length < 256) return null
  const s = welchSpectrum(x.subarray(0, Math.min(x.length, 8192)), { sampleIntervalS: 1, segmentLength: 64 })
  let total = 0
  for (let k = 1; k < s.power.length; k++) total += s.power[k]
  if (!(total > 0)) return null
  let share = 0
  let period = NaN
  for (let k = 14; k < s.power.length; k++) {
    let band = 0
    for (let j = Math.max(1, k - 2); j <= Math.min(s.power.length - 1, k + 2); j++) band += s.power[j]
    if (band / total > share) {
      share = band / total
      period = 1 / s.frequencyHz[k]
    }
  }
  return { share, period }
}
