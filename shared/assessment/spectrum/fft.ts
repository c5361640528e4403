import FFT from 'fft.js'

/** Discrete Fourier transform of one fixed length. Complex arrays are interleaved: re, im, re, im, … */
export interface FourierTransform {
  readonly size: number
  /** X_k = sum_t x_t exp(-2 pi i k t / size): real `x` (length size) into `out` (length 2 size, all frequencies). */
  forward(x: Float64Array, out: Float64Array): void
  /** The same, only frequencies 0 .. size/2 are written: half the work where the rest is not looked at. */
  forwardHalf(x: Float64Array, out: Float64Array): void
  /** x_t = (1/size) sum_k X_k exp(2 pi i k t / size): complex `spectrum` into `out`, both of length 2 size, not the same. */
  inverse(spectrum: Float64Array, out: Float64Array): void
}

/** A week of one loop needs a handful of lengths; more than this would be a caller passing arbitrary ones. */
const KEPT = 24
const cache = new Map<number, FourierTransform>()

/**
 * The Fourier transform of a given length, kept for reuse: its tables cost more than one transform.
 *
 * Powers of two go straight to fft.js; other lengths through the chirp transform (three transforms of the next power
 * of two above 2 size). The returned object holds working memory: not for two overlapping uses of one length.
 *
 * @param size length, integer >= 2
 * @returns transform object; `forward` and `inverse` throw on a wrong array length
 * @throws RangeError when size is no integer >= 2
 * Source: definition; L. I. Bluestein (1970) A linear filtering approach to the computation of discrete Fourier
 * transform, IEEE Trans. Audio Electroacoustics 18:451-455. Reference: fixtures/reference/numpy.json (numpy.fft).
 */
export function fft(size: number): FourierTransform {
  if (!Number.isInteger(size) || size < 2) throw new RangeError(`fft size must be an integer >= 2, got ${size}`)
  let transform = cache.get(size)
  if (transform) return transform
  transform = (size & (size - 1)) === 0 ? powerOfTwo(size) : chirp(size)
  if (cache.size >= KEPT) cache.delete(cache.keys().next().value!)
  cache.set(size, transform)
  return transform
}

function requireLength(actual: number, wanted: number, what: string): void {
  if (actual !== wanted) throw new RangeError(`fft ${what} must have length ${wanted}, got ${actual}`)
}

function powerOfTwo(size: number): FourierTransform {
  const plan = new FFT(size)
  const forwardHalf = (x: Float64Array, out: Float64Array) => {
      requireLength(x.length, size, 'input')
      requireLength(out.length, 2 * size, 'output')
      // fft.js' real transform does not treat length 2 (its smallest radix block is 4)
      if (size === 2) {
        out[0] = x[0] + x[1]
        out[1] = 0
        out[2] = x[0] - x[1]
        out[3] = 0
      }
      else plan.realTransform(out, x)
  }
  return {
    size,
    forwardHalf,
    forward(x, out) {
      forwardHalf(x, out)
      if (size > 2) plan.completeSpectrum(out)
    },
    inverse(spectrum, out) {
      requireLength(spectrum.length, 2 * size, 'spectrum')
      requireLength(out.length, 2 * size, 'output')
      plan.inverseTransform(out, spectrum)
    },
  }
}

function chirp(size: number): FourierTransform {
  let inner = 1
  while (inner < 2 * size) inner *= 2
  const plan = new FFT(inner)
  const cos = new Float64Array(size)
  const sin = new Float64Array(size)
  const kernel = new Float64Array(2 * inner)
  for (let t = 0; t < size; t++) {
    // t^2 modulo 2 size keeps the angle small, and with it its digits
    const angle = Math.PI * ((t * t) % (2 * size)) / size
    cos[t] = Math.cos(angle)
    sin[t] = Math.sin(angle)
    kernel[2 * t] = cos[t]
    kernel[2 * t + 1] = sin[t]
    if (t > 0) {
      kernel[2 * (inner - t)] = cos[t]
      kernel[2 * (inner - t) + 1] = sin[t]
    }
  }
  const kernelSpectrum = new Float64Array(2 * inner)
  plan.transform(kernelSpectrum, kernel)
  const work = new Float64Array(2 * inner)
  const other = new Float64Array(2 * inner)

  /** out = sum_t z_t exp(-2 pi i k t / size), z in `work[0 .. 2 size)` */
  const transform = (out: Float64Array): void => {
    for (let t = 0; t < size; t++) {
      const re = work[2 * t]
      const im = work[2 * t + 1]
      work[2 * t] = re * cos[t] + im * sin[t]
      work[2 * t + 1] = im * cos[t] - re * sin[t]
    }
    work.fill(0, 2 * size)
    plan.transform(other, work)
    for (let k = 0; k < inner; k++) {
      const re = other[2 * k]
      const im = other[2 * k + 1]
      const kr = kernelSpectrum[2 * k]
      const ki = kernelSpectrum[2 * k + 1]
      other[2 * k] = re * kr - im * ki
      other[2 * k + 1] = re * ki + im * kr
    }
    plan.inverseTransform(work, other)
    for (let k = 0; k < size; k++) {
      const re = work[2 * k]
      const im = work[2 * k + 1]
      out[2 * k] = re * cos[k] + im * sin[k]
      out[2 * k + 1] = im * cos[k] - re * sin[k]
    }
  }
  const forward = (x: Float64Array, out: Float64Array) => {
      requireLength(x.length, size, 'input')
      requireLength(out.length, 2 * size, 'output')
      for (let t = 0; t < size; t++) {
        work[2 * t] = x[t]
        work[2 * t + 1] = 0
      }
      transform(out)
  }
  return {
    size,
    forward,
    // a chirp transform knows no halves
    forwardHalf: forward,
    inverse(spectrum, out) {
      requireLength(spectrum.length, 2 * size, 'spectrum')
      requireLength(out.length, 2 * size, 'output')
      // inverse = conjugate of the forward transform of the conjugate, over size
      for (let k = 0; k < size; k++) {
        work[2 * k] = spectrum[2 * k]
        work[2 * k + 1] = -spectrum[2 * k + 1]
      }
      transform(out)
      for (let k = 0; k < size; k++) {
        out[2 * k] /= size
        out[2 * k + 1] /= -size
      }
    },
  }
}
