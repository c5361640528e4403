import type { SeededRandom } from './seededRandom'

/**
 * One resample of the stationary bootstrap, as indices into the record: blocks of geometric length, wrapped at the end.
 *
 * Indices instead of values, so that several records of one loop can be resampled together.
 *
 * @param length n >= 1, samples of the record
 * @param meanBlockLength mean of the block length, >= 1 (see bootstrapBlockLength); 1: independent draws
 * @param random seeded source, moved on
 * @param out reused when given, length n
 * @returns n indices in 0..n-1
 * @throws RangeError outside these ranges
 * Source: D. N. Politis, J. P. Romano (1994) The stationary bootstrap, J. American Statistical Association
 * 89:1303-1313. Reference: their closed form for the variance of the bootstrap mean, in the test. Cost O(n).
 */
export function stationaryBootstrap(length: number, meanBlockLength: number, random: SeededRandom, out = new Int32Array(Math.max(0, length | 0))): Int32Array {
  if (!Number.isInteger(length) || length < 1) throw new RangeError(`bootstrap needs a record of at least 1 sample, got ${length}`)
  if (!(meanBlockLength >= 1)) throw new RangeError(`mean block length must be at least 1, got ${meanBlockLength}`)
  if (out.length !== length) throw new RangeError(`out must have length ${length}, got ${out.length}`)
  const restart = 1 / meanBlockLength
  let at = 0
  for (let i = 0; i < length; i++) {
    if (i === 0 || random.uniform() < restart) at = random.integer(length)
    else at = at + 1 === length ? 0 : at + 1
    out[i] = at
  }
  return out
}
