import type { SeededRandom } from './seededRandom'
import { fft } from '../spectrum/fft'
import { mean } from './mean'

/**
 * A surrogate record: the same values in another order, with (nearly) the same spectrum and no other structure.
 *
 * Iterative amplitude-adjusted Fourier transform: shuffle, then in turn impose the record's spectral magnitudes and its
 * values by rank, until the order no longer changes or `iterations` are done. The values are exact, the spectrum nearly
 * so. A record that does not end as it begins gets false high frequencies in its surrogates: cut it to whole periods.
 *
 * @param x length n >= 8, finite
 * @param random seeded source, moved on
 * @param iterations at most so many, integer >= 1, default 30
 * @returns new array, a permutation of x
 * @throws RangeError on a record of fewer than 8 samples
 * Source: T. Schreiber, A. Schmitz (1996) Improved surrogate data for nonlinearity tests, Physical Review Letters
 * 77:635-638. Reference: the properties by definition, in the test. Cost O(iterations n log n).
 */
export function surrogate(x: Float64Array, random: SeededRandom, iterations = 30): Float64Array {
  const n = x.length
  if (n < 8) throw new RangeError(`a surrogate needs at least 8 samples, got ${n}`)
  const transform = fft(n)
  const m = mean(x)
  const target = new Float64Array(2 * n)
  transform.forward(x.map(v => v - m), target)
  const magnitude = Float64Array.from({ length: n }, (_, k) => Math.sqrt(target[2 * k] ** 2 + target[2 * k + 1] ** 2))
  const values = x.slice().sort()

  const current = x.slice()
  for (let i = n - 1; i > 0; i--) {
    const j = random.integer(i + 1)
    const kept = current[i]
    current[i] = current[j]
    current[j] = kept
  }
  const spectrum = new Float64Array(2 * n)
  const shaped = new Float64Array(2 * n)
  const real = new Float64Array(n)
  const keys = new Float64Array(n)
  const before = new Uint32Array(n)
  // value and index in one number, so that the native sort of a typed array ranks them: ten times faster than a comparator
  let places = 1
  while (places < n) places *= 2
  const levels = 2 ** 52 / places
  for (let round = 0; round < iterations; round++) {
    for (let i = 0; i < n; i++) real[i] = current[i] - m
    transform.forward(real, spectrum)
    for (let k = 0; k < n; k++) {
      const size = Math.sqrt(spectrum[2 * k] ** 2 + spectrum[2 * k + 1] ** 2)
      const scale = size > 0 ? magnitude[k] / size : 0
      spectrum[2 * k] *= scale
      spectrum[2 * k + 1] *= scale
    }
    transform.inverse(spectrum, shaped)
    let low = Infinity
    let high = -Infinity
    for (let i = 0; i < n; i++) {
      low = Math.min(low, shaped[2 * i])
      high = Math.max(high, shaped[2 * i])
    }
    const scale = high > low ? (levels - 1) / (high - low) : 0
    for (let i = 0; i < n; i++) keys[i] = Math.floor((shaped[2 * i] - low) * scale) * places + i
    keys.sort()
    let moved = 0
    for (let r = 0; r < n; r++) {
      const i = keys[r] % places
      current[i] = values[r]
      if (i !== before[r]) moved++
      before[r] = i
    }
    if (moved === 0) break
  }
  return current
}
