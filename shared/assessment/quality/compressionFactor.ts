import { insufficient, type Insufficient } from '../types'

export interface CompressionFactor {
  status: 'ok'
  /** N / (N - zero second differences), >= 1; recommended upper limit 3 */
  factor: number
  /** N / (N - repeats): factor of a record that holds each value until the next one comes, >= 1 */
  repeatFactor: number
  samples: number
  zeroSecondDifferences: number
  /** samples equal to the one before */
  repeats: number
  /** second differences up to this count as zero, unit of x */
  tolerance: number
}

/**
 * Compression factor of a record that a historian has thinned and drawn again with straight lines between the kept
 * points.
 *
 * On a straight line the second difference is zero; with values rounded to a step q it is zero only within 2 q, so that
 * is the tolerance (an exact test on data of 3 decimals gives 1.5 instead of 3.0, and 1.8 instead of 9.9). Without a
 * step the tolerance is 1e-9 of the range. Repeats are counted separately, because a zero-order hold of 5 samples
 * leaves a second difference at both ends and shows as 2.5.
 *
 * Where the step is coarse against the movement, rounding alone makes second differences within 2 q: then the factor
 * cannot be told. This is taken to be so unless at least half of the differences beyond the tolerance are beyond twice
 * the tolerance (ours).
 *
 * @param x regular samples, at least 20 known ones; NaN: missing, second differences across it are not formed
 * @param quantum quantisation step of x (see quantisationStep), >= 0, unit of x; 0: none
 * @returns factor and what it was made of; or insufficient, with the reason
 * @throws RangeError when quantum is negative or not finite
 * Source: N. F. Thornhill, M. A. A. S. Choudhury, S. L. Shah (2004) The impact of compression on data-driven process
 * analyses, J. Process Control 14:389-398. The formula is from memory of the publication; tolerance and the separate
 * count of repeats are ours, from measured failures. Reference: fixtures/reference/compression.json. Cost O(n).
 */
export function compressionFactor(x: Float64Array, quantum: number): CompressionFactor | Insufficient {
  if (!(quantum >= 0) || !Number.isFinite(quantum)) throw new RangeError(`quantum must be 0 or more, got ${quantum}`)
  let low = Infinity
  let high = -Infinity
  let samples = 0
  let repeats = 0
  for (let i = 0; i < x.length; i++) {
    if (x[i] !== x[i]) continue
    samples++
    if (x[i] < low) low = x[i]
    if (x[i] > high) high = x[i]
    if (i > 0 && x[i] === x[i - 1]) repeats++
  }
  if (samples < 20) return insufficient(`${samples} samples, at least 20 are needed`)
  if (!(high > low)) return insufficient('the record does not change')
  // the small excess is for values that sit on a decimal, not a binary, grid
  const tolerance = Math.max(2.001 * quantum, 1e-9 * (high - low))
  let beyond = 0
  let farBeyond = 0
  let zero = 0
  for (let i = 1; i + 1 < x.length; i++) {
    const d = Math.abs(x[i + 1] - 2 * x[i] + x[i - 1])
    if (d <= tolerance) zero++
    else if (d > tolerance) {
      beyond++
      if (d >= 2 * tolerance) farBeyond++
    }
  }
  if (quantum > 0 && (beyond === 0 || 2 * farBeyond < beyond)) return insufficient('the resolution is too coarse against the movement: rounding hides whether the record was thinned')
  return { status: 'ok', factor: samples / (samples - zero), repeatFactor: samples / (samples - repeats), samples, zeroSecondDifferences: zero, repeats, tolerance }
}
