import { requireFinite } from '../statistics/requireFinite'
import { fft } from './fft'

export interface Bicoherence {
  /** squared bicoherence 0..1 at the pairs (first[i], second[i]); NaN where no power is */
  squared: Float64Array
  /** frequency bins of a pair, 1 <= second <= first, first + second <= segmentLength / 2; one bin is 1 / (segmentLength dt) */
  first: Int32Array
  second: Int32Array
  segments: number
  /** mean over the pairs, NaN for a record without power */
  meanSquared: number
  /** largest value, and at which pair */
  maximumSquared: number
  maximumAt: number
}

/**
 * Squared bicoherence: how far the phases at two frequencies and at their sum keep step, from segment to segment.
 *
 * bic^2 = |E X1 X2 conj(X12)|^2 / (E|X1 X2|^2 E|X12|^2) by direct averaging over segments, mean of each removed, periodic
 * Hann window, over the inner triangle. Without coupling its mean is about 1 / segments, and one value exceeds
 * 5.99 / (2 segments) by chance in 5 %. Blind to symmetric wave forms: odd harmonics only leave no trace in it.
 *
 * @param x length >= 8 segments, finite, regular samples
 * @param options segmentLength, even integer >= 8, default 64; overlapFraction in [0, 1), default 0 (overlap makes the
 *   chance level above wrong)
 * @returns values over the triangle with their summary
 * @throws RangeError on values that are not finite, a record of fewer than 8 segments, or options outside their range
 * Source: Y. C. Kim, E. J. Powers (1979) Digital bispectral analysis, IEEE Trans. Plasma Science 7:120-131 (normalisation
 * in 0..1); M. A. A. S. Choudhury, S. L. Shah, N. F. Thornhill (2004) Diagnosis of poor control-loop performance using
 * higher-order statistics, Automatica 40:1719-1728. Window, overlap and segment length of the latter are not known to us.
 * Reference: fixtures/reference/bicoherence.json. Cost O(n segmentLength / 16).
 */
export function bicoherence(x: Float64Array, options: { segmentLength?: number, overlapFraction?: number } = {}): Bicoherence {
  const { segmentLength: length = 64, overlapFraction = 0 } = options
  if (!Number.isInteger(length) || length < 8 || length % 2 !== 0) throw new RangeError(`segmentLength must be an even integer of at least 8, got ${length}`)
  if (!(overlapFraction >= 0 && overlapFraction < 1)) throw new RangeError(`overlapFraction must be in [0, 1), got ${overlapFraction}`)
  const step = length - Math.floor(length * overlapFraction)
  const segments = Math.floor((x.length - length) / step) + 1
  if (segments < 8) throw new RangeError(`bicoherence needs at least 8 segments of ${length} samples, got ${Math.max(0, segments)}`)
  requireFinite(x, 'x')

  const half = length / 2
  const pairs = Math.floor(half * half / 4)
  const first = new Int32Array(pairs)
  const second = new Int32Array(pairs)
  let count = 0
  for (let i = 1; i < half; i++) {
    for (let j = 1; j <= i && i + j <= half; j++) {
      first[count] = i
      second[count++] = j
    }
  }
  const window = Float64Array.from({ length }, (_, i) => 0.5 - 0.5 * Math.cos(2 * Math.PI * i / length))
  const transform = fft(length)
  const segment = new Float64Array(length)
  const spectrum = new Float64Array(2 * length)
  const re = new Float64Array(pairs)
  const im = new Float64Array(pairs)
  const product = new Float64Array(pairs)
  const power = new Float64Array(half + 1)
  let squares = 0
  for (let s = 0; s < segments; s++) {
    const from = s * step
    let sum = 0
    for (let i = 0; i < length; i++) sum += x[from + i]
    const m = sum / length
    for (let i = 0; i < length; i++) segment[i] = (x[from + i] - m) * window[i]
    transform.forward(segment, spectrum)
    for (let k = 1; k <= half; k++) power[k] += spectrum[2 * k] ** 2 + spectrum[2 * k + 1] ** 2
    for (let i = 0; i < length; i++) squares += x[from + i] ** 2
    let p = 0
    for (let i = 1; i < half; i++) {
      const ar = spectrum[2 * i]
      const ai = spectrum[2 * i + 1]
      const last = Math.min(i, half - i)
      for (let j = 1; j <= last; j++, p++) {
        const br = spectrum[2 * j]
        const bi = spectrum[2 * j + 1]
        const pr = ar * br - ai * bi
        const pi = ar * bi + ai * br
        const cr = spectrum[2 * (i + j)]
        const ci = spectrum[2 * (i + j) + 1]
        product[p] += pr * pr + pi * pi
        re[p] += pr * cr + pi * ci
        im[p] += pi * cr - pr * ci
      }
    }
  }

  const squared = new Float64Array(pairs)
  let mean = 0
  let maximumSquared = -Infinity
  let maximumAt = 0
  // what the transform leaves of a constant is rounding, and its phases would keep step perfectly
  const floor = 1e-24 * squares
  for (let p = 0; p < pairs; p++) {
    const sum = power[first[p] + second[p]]
    const known = sum > floor && power[first[p]] > floor && power[second[p]] > floor
    squared[p] = known ? (re[p] * re[p] + im[p] * im[p]) / (product[p] * sum) : NaN
    mean += squared[p] / pairs
    if (squared[p] > maximumSquared) {
      maximumSquared = squared[p]
      maximumAt = p
    }
  }
  return { squared, first, second, segments, meanSquared: mean, maximumSquared: maximumSquared >= 0 ? maximumSquared : NaN, maximumAt }
}
