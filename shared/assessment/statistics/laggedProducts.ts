import { fft } from '../spectrum/fft'

/** Below this lag the plain double loop beats the transforms (measured on 2,000 to 60,000 samples). */
const DIRECT_UP_TO = 40

/**
 * Sums of lagged products s_k = sum_t a_t b_(t+k), t = 0 .. n-1-k, for k = 0 .. maxLag.
 *
 * Direct for short lags, else by block transforms: blocks of B samples, padded to 2 B, where B is the power of two at
 * or above maxLag; cost O(n log B) instead of O(n maxLag), and the small blocks stay in the cache.
 *
 * @param a length n >= 1, finite
 * @param b length n; may be the same array as a (then half the transforms are saved)
 * @param maxLag integer 0..n-1
 * @returns length maxLag + 1, unit of a times unit of b
 * @throws RangeError on unequal lengths or a lag outside 0..n-1
 * Source: C. M. Rader (1970) An improved algorithm for high speed autocorrelation with applications to spectral
 * estimation, IEEE Trans. Audio Electroacoustics 18:439-441. Reference: R acf and ccf through autocorrelation and
 * crossCorrelation; direct sums in the test.
 */
export function laggedProducts(a: Float64Array, b: Float64Array, maxLag: number): Float64Array {
  const n = a.length
  if (b.length !== n) throw new RangeError(`lagged products need arrays of one length, got ${n} and ${b.length}`)
  if (!Number.isInteger(maxLag) || maxLag < 0 || maxLag > n - 1) throw new RangeError(`maxLag must be an integer from 0 to n - 1 = ${n - 1}, got ${maxLag}`)
  const sums = new Float64Array(maxLag + 1)
  if (maxLag <= DIRECT_UP_TO || n < 4 * DIRECT_UP_TO) {
    for (let k = 0; k <= maxLag; k++) {
      // four partial sums: shorter dependency chain, and less rounding than one long sum
      const end = n - k
      let s0 = 0, s1 = 0, s2 = 0, s3 = 0
      let t = 0
      for (; t + 3 < end; t += 4) {
        s0 += a[t] * b[t + k]
        s1 += a[t + 1] * b[t + 1 + k]
        s2 += a[t + 2] * b[t + 2 + k]
        s3 += a[t + 3] * b[t + 3 + k]
      }
      for (; t < end; t++) s0 += a[t] * b[t + k]
      sums[k] = (s0 + s1) + (s2 + s3)
    }
    return sums
  }

  let block = 64
  while (block < maxLag) block *= 2
  const size = 2 * block
  const transform = fft(size)
  const same = a === b
  const padded = new Float64Array(size)
  const load = (x: Float64Array, from: number, out: Float64Array): void => {
    padded.fill(0)
    padded.set(x.subarray(from, Math.min(n, from + block)))
    transform.forwardHalf(padded, out)
  }
  let spectrumB = new Float64Array(2 * size)
  let nextB = new Float64Array(2 * size)
  const spectrumA = new Float64Array(2 * size)
  const cross = new Float64Array(2 * size)
  load(b, 0, spectrumB)
  for (let from = 0; from < n; from += block) {
    const last = from + block >= n
    if (last) nextB.fill(0)
    else load(b, from + block, nextB)
    let left = spectrumB
    if (!same) {
      load(a, from, spectrumA)
      left = spectrumA
    }
    // conj(A_i) (B_i + (-1)^k B_(i+1)): block i+1 sits `block` samples later in the padded window
    for (let k = 0, sign = 1; k <= block; k++, sign = -sign) {
      const ar = left[2 * k]
      const ai = left[2 * k + 1]
      const br = spectrumB[2 * k] + sign * nextB[2 * k]
      const bi = spectrumB[2 * k + 1] + sign * nextB[2 * k + 1]
      cross[2 * k] += ar * br + ai * bi
      cross[2 * k + 1] += ar * bi - ai * br
    }
    const swap = spectrumB
    spectrumB = nextB
    nextB = swap
  }
  for (let k = 1; k < block; k++) {
    cross[2 * (size - k)] = cross[2 * k]
    cross[2 * (size - k) + 1] = -cross[2 * k + 1]
  }
  transform.inverse(cross, spectrumB)
  for (let k = 0; k <= maxLag; k++) sums[k] = spectrumB[2 * k]
  return sums
}
