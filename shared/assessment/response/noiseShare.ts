import { welchSpectrum } from '../spectrum/welchSpectrum'
import { variance } from '../statistics/variance'
import { insufficient, type Insufficient } from '../types'

/**
 * Share of a signal's variance above the control bandwidth, where the loop cannot act: near 1 the error is noise.
 *
 * The bandwidth is taken as 4 / (2 pi settling horizon): a first-order loop settles to 2 % in four time constants.
 * Domain: at least eight settling horizons, and a sampling rate of at least four times the bandwidth.
 * @param signal finite (bridged), length n
 * @param options sampleIntervalS > 0, settlingS > 0
 * @returns share in 0..1
 * Source: definition (Welch 1967 for the spectrum); the bandwidth is our default. White noise: 1 - bandwidth / half the
 * sampling rate. O(n log n).
 */
export function noiseShare(signal: Float64Array, { sampleIntervalS, settlingS }: { sampleIntervalS: number, settlingS: number }): number | Insufficient {
  if (!(sampleIntervalS > 0)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  if (!(settlingS > 0)) throw new RangeError(`settlingS must be above 0, got ${settlingS}`)
  const bandwidthHz = 4 / (2 * Math.PI * settlingS)
  if (signal.length * sampleIntervalS < 8 * settlingS) return insufficient('fewer than eight settling horizons of data')
  if (bandwidthHz > 1 / (4 * sampleIntervalS)) return insufficient('sampled too slowly to see above the control bandwidth')
  let segmentLength = 16
  while (segmentLength * sampleIntervalS < 4 * settlingS) segmentLength *= 2
  if (segmentLength > signal.length) segmentLength /= 2
  if (segmentLength < 16 || segmentLength > signal.length) return insufficient('too few samples')
  const { frequencyHz, power } = welchSpectrum(signal, { sampleIntervalS, segmentLength })
  // Against the variance of the whole record: segments do not see what is slower than they are long.
  const total = variance(signal, 0)
  let above = 0
  if (!(total > 0)) return insufficient('the signal stands still')
  for (let k = 1; k < power.length; k++) if (frequencyHz[k] > bandwidthHz) above += power[k] * frequencyHz[1]
  return Math.min(1, above / total)
}
