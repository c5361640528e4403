import { requireFinite } from '../statistics/requireFinite'
import { fft } from './fft'

export interface WelchSpectrum {
  /** Hz, from 0 to half the sampling frequency, floor(segmentLength / 2) + 1 values */
  frequencyHz: Float64Array
  /** one-sided power spectral density, square of the unit of x per Hz */
  power: Float64Array
  /** number of segments averaged */
  segments: number
}

/**
 * Power spectral density by Welch's method: periodic Hann window, mean of each segment removed, one-sided density.
 *
 * Equal to scipy.signal.welch(x, fs = 1 / sampleIntervalS, 'hann', nperseg = segmentLength, noverlap =
 * floor(segmentLength * overlapFraction), detrend = 'constant', scaling = 'density'). A tail that does not fill a
 * segment is not used. Powers of two are fastest.
 *
 * @param x length >= segmentLength, finite
 * @param options sampleIntervalS > 0 (s); segmentLength integer >= 4 (samples); overlapFraction in [0, 1), default 0.5
 * @throws RangeError on a value that is not finite or an option outside its range
 * Source: P. D. Welch (1967) The use of fast Fourier transform for the estimation of power spectra, IEEE Trans. Audio
 * Electroacoustics 15:70-73. Reference: fixtures/reference/numpy.json (scipy.signal.welch).
 * Cost O(n log segmentLength / (1 - overlapFraction)).
 */
export function welchSpectrum(
  x: Float64Array,
  options: { sampleIntervalS: number, segmentLength: number, overlapFraction?: number },
): WelchSpectrum {
  const { sampleIntervalS, segmentLength: length, overlapFraction = 0.5 } = options
  if (!(sampleIntervalS > 0) || !Number.isFinite(sampleIntervalS)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  if (!Number.isInteger(length) || length < 4 || length > x.length) throw new RangeError(`segmentLength must be an integer from 4 to the record's length ${x.length}, got ${length}`)
  if (!(overlapFraction >= 0 && overlapFraction < 1)) throw new RangeError(`overlapFraction must be in [0, 1), got ${overlapFraction}`)
  requireFinite(x, 'x')

  const step = length - Math.floor(length * overlapFraction)
  const bins = Math.floor(length / 2) + 1
  const window = new Float64Array(length)
  let windowSquares = 0
  for (let i = 0; i < length; i++) {
    window[i] = 0.5 - 0.5 * Math.cos(2 * Math.PI * i / length)
    windowSquares += window[i] * window[i]
  }
  const transform = fft(length)
  const segment = new Float64Array(length)
  const spectrum = new Float64Array(2 * length)
  const power = new Float64Array(bins)
  let segments = 0
  for (let from = 0; from + length <= x.length; from += step) {
    let sum = 0
    for (let i = 0; i < length; i++) sum += x[from + i]
    const m = sum / length
    for (let i = 0; i < length; i++) segment[i] = (x[from + i] - m) * window[i]
    transform.forwardHalf(segment, spectrum)
    for (let k = 0; k < bins; k++) power[k] += spectrum[2 * k] * spectrum[2 * k] + spectrum[2 * k + 1] * spectrum[2 * k + 1]
    segments++
  }
  const scale = sampleIntervalS / (windowSquares * segments)
  const frequencyHz = new Float64Array(bins)
  for (let k = 0; k < bins; k++) {
    frequencyHz[k] = k / (length * sampleIntervalS)
    // negative frequencies are folded in, except at 0 and at half the sampling frequency, which have no twin
    power[k] *= k === 0 || 2 * k === length ? scale : 2 * scale
  }
  return { frequencyHz, power, segments }
}
