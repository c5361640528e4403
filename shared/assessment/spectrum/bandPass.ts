import { mean } from '../statistics/mean'
import { requireFinite } from '../statistics/requireFinite'
import { fft } from './fft'

/**
 * Zero-phase band-pass: keeps the part of the record between two frequencies, without delay.
 *
 * The mean-removed record is mirrored at both ends, fading over one and a half periods of the low edge, transformed,
 * weighted and transformed back. (Mirrored, not turned about its end point: turning about a point that lies off the
 * local mean shifts the level of the whole continuation, and that leaks into a low band.) The weight is 1 within the
 * band and falls as a raised cosine to 0 over `edgeFraction` of each edge frequency outside it: soft edges ring less
 * than a box. The first and last period of the low edge are less sure than the middle.
 *
 * @param x length n >= 4, finite, regular samples
 * @param options sampleIntervalS > 0 (s); 0 <= lowHz < highHz (Hz; lowHz 0: low-pass without the mean; highHz at or above half
 *   the sampling frequency: high-pass); edgeFraction in (0, 1), default 0.1
 * @returns length n, unit of x, mean about 0
 * @throws RangeError on a value that is not finite or an option outside its range
 * Source: definition (frequency-domain weighting); the spectral filter for oscillation detection of N. F. Thornhill,
 * B. Huang, H. Zhang (2003) Detection of multiple oscillations in control loops, J. Process Control 13:91-100; edges and
 * mirroring are ours. Reference: closed forms on sines in the test. Cost O(n log n).
 */
export function bandPass(
  x: Float64Array,
  options: { sampleIntervalS: number, lowHz: number, highHz: number, edgeFraction?: number },
): Float64Array {
  const { sampleIntervalS, lowHz, highHz, edgeFraction = 0.1 } = options
  const n = x.length
  if (n < 4) throw new RangeError(`band-pass needs at least 4 samples, got ${n}`)
  if (!(sampleIntervalS > 0) || !Number.isFinite(sampleIntervalS)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  if (!(lowHz >= 0 && highHz > lowHz)) throw new RangeError(`band must satisfy 0 <= lowHz < highHz, got ${lowHz} and ${highHz}`)
  if (!(edgeFraction > 0 && edgeFraction < 1)) throw new RangeError(`edgeFraction must be in (0, 1), got ${edgeFraction}`)
  requireFinite(x, 'x')

  const longest = lowHz > 0 ? 1 / lowHz : n * sampleIntervalS
  const margin = Math.min(n - 1, Math.ceil(1.5 * longest / sampleIntervalS))
  let size = 4
  while (size < n + 2 * margin) size *= 2
  const m = mean(x)
  const extended = new Float64Array(size)
  for (let i = 0; i < n; i++) extended[i] = x[i] - m
  // after the end, then (circularly) before the begin; both fade to the zeros between them
  for (let j = 1; j <= margin; j++) {
    const fade = 0.5 + 0.5 * Math.cos(Math.PI * j / (margin + 1))
    extended[n - 1 + j] = fade * extended[n - 1 - j]
    extended[size - j] = fade * extended[j]
  }
  const transform = fft(size)
  const spectrum = new Float64Array(2 * size)
  const filtered = new Float64Array(2 * size)
  transform.forwardHalf(extended, spectrum)
  for (let k = 0; k <= size / 2; k++) {
    const f = k / (size * sampleIntervalS)
    const weight = k === 0 ? 0 : edge(f, lowHz, -edgeFraction) * edge(f, highHz, edgeFraction)
    spectrum[2 * k] *= weight
    spectrum[2 * k + 1] *= weight
    if (k > 0 && 2 * k < size) {
      spectrum[2 * (size - k)] = spectrum[2 * k]
      spectrum[2 * (size - k) + 1] = -spectrum[2 * k + 1]
    }
  }
  transform.inverse(spectrum, filtered)
  const out = new Float64Array(n)
  for (let i = 0; i < n; i++) out[i] = filtered[2 * i]
  return out
}

/** 1 inside, raised cosine over |fraction| of the limit outside it; fraction < 0: the lower limit of a band. */
function edge(f: number, limit: number, fraction: number): number {
  const beyond = (f - limit) / (limit * fraction)
  if (!(beyond > 0)) return 1
  return beyond >= 1 ? 0 : 0.5 + 0.5 * Math.cos(Math.PI * beyond)
}
