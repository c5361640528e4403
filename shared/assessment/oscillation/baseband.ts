import { fft } from '../spectrum/fft'

/** Fewest baseband samples to a period (twice as many at most, below 32 periods more). */
export const PER_PERIOD = 4

export interface Baseband {
  /** complex amplitude, interleaved re, im: the band is Re(a exp(2 pi i frequency t)), t in samples from the record's begin */
  a: Float64Array
  /** samples of the record to one of the baseband */
  stride: number
}

/** Transform of a record's differences, kept for all bands of the record. */
export interface StepSpectrum { spectrum: Float64Array, size: number, length: number }

export function stepSpectrum(steps: Float64Array): StepSpectrum {
  let size = 64
  while (size < steps.length * 1.03) size *= 2
  const padded = new Float64Array(size)
  padded.set(steps)
  const spectrum = new Float64Array(2 * size)
  fft(size).forwardHalf(padded, spectrum)
  return { spectrum, size, length: steps.length }
}

/**
 * One band of a record, shifted to frequency 0 and thinned to four to eight samples a period. Working from the differences
 * (undone within the band) spares the ends and the gaps the jump that would ring through the band.
 * @param frequency carrier, cycles per sample
 * @param low lower edge, cycles per sample, half weight (raised cosine, a fifth of the distance to the carrier either side)
 * @param high upper edge, likewise
 * O(n log n) at worst, less for slow bands.
 */
export function baseband({ spectrum, size, length }: StepSpectrum, { frequency, low, high }: { frequency: number, low: number, high: number }): Baseband {
  const centre = Math.round(frequency * size)
  let narrow = 32
  while (narrow < PER_PERIOD * centre && narrow < size) narrow *= 2
  const half = narrow >> 1
  const shifted = new Float64Array(2 * narrow), a = new Float64Array(2 * narrow)
  const lowSoft = 0.2 * (centre - low * size), highSoft = 0.2 * (high * size - centre)
  for (let k = Math.max(1, centre - half); k < Math.min(size >> 1, centre + half); k++) {
    const x = k < centre ? (k - low * size) / lowSoft : (high * size - k) / highSoft
    if (x <= -1) continue
    const weight = x >= 1 ? 1 : 0.5 + 0.5 * Math.sin(Math.PI * x / 2)
    // X = D / (1 - exp(-i w)); twice, because the negative frequencies are left out
    const w = 2 * Math.PI * k / size
    const re = 1 - Math.cos(w), im = Math.sin(w)
    const scale = 2 * weight / (re * re + im * im) * narrow / size
    const dr = spectrum[2 * k], di = spectrum[2 * k + 1]
    const at = 2 * ((k - centre + narrow) % narrow)
    shifted[at] = (dr * re + di * im) * scale
    shifted[at + 1] = (di * re - dr * im) * scale
  }
  fft(narrow).inverse(shifted, a)
  // The carrier was moved to a whole bin: turn the rest back, so that phase counts from `frequency`.
  const stride = size / narrow
  const turn = 2 * Math.PI * (centre / size - frequency) * stride
  const kept = Math.min(narrow, Math.ceil(length / stride))
  for (let n = 0; n < kept; n++) {
    const c = Math.cos(turn * n), s = Math.sin(turn * n)
    const re = a[2 * n], im = a[2 * n + 1]
    a[2 * n] = re * c - im * s
    a[2 * n + 1] = re * s + im * c
  }
  return { a: a.subarray(0, 2 * kept), stride }
}
