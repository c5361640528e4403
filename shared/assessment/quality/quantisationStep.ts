import { select } from '../statistics/select'
import { variance } from '../statistics/variance'

export interface QuantisationStep {
  /** unit of x; 0: no step can be seen, the values do not lie on a grid (or do not change at all) */
  step: number
  /** step over the standard deviation of x; 0 without a step, NaN for a record that does not change */
  factor: number
}

/** Share of the changes that must be whole multiples of the step. */
const ON_GRID = 0.98
/** How far from a whole multiple a change may lie, in steps. */
const OFF_GRID = 0.05
/** A step finer than this share of the mean change is not looked for: it would be the rounding of the numbers. */
const FINEST = 1e-6

/**
 * Resolution of a recorded signal: the largest step of which the changes between neighbours are whole multiples.
 *
 * The smallest change is the first candidate. While too many changes are no multiples of it, Euclid's division goes on:
 * what the changes leave over is itself a multiple of the true step, so the median remainder is the next, smaller
 * candidate. At last the step is refined on the short changes, before the long ones are held to it.
 *
 * @param x any length, NaN allowed (missing)
 * @returns step and its ratio to the standard deviation (quantisation factor)
 * Source: N. F. Thornhill, M. A. A. S. Choudhury, S. L. Shah (2004) The impact of compression on data-driven process
 * analyses, J. Process Control 14:389-398 (factor step / standard deviation, from memory); the grid test is ours.
 * Reference: fixtures/reference/compression.json (quant_*). Cost O(n) for a signal on a coarse grid, O(n log n) at worst.
 */
export function quantisationStep(x: Float64Array): QuantisationStep {
  let length = 0
  const finite = new Float64Array(x.length)
  for (let i = 0; i < x.length; i++) if (x[i] - x[i] === 0) finite[length++] = x[i]
  const known = finite.subarray(0, length)
  const changes = new Float64Array(known.length)
  let count = 0
  let smallest = Infinity
  let total = 0
  for (let i = 1; i < known.length; i++) {
    const d = Math.abs(known[i] - known[i - 1])
    // smaller ones are the rounding of two decimal texts, as in 0.3 - 0.2 against 0.1
    if (d > 1e-12 * Math.max(Math.abs(known[i]), Math.abs(known[i - 1]))) {
      changes[count++] = d
      total += d
      if (d < smallest) smallest = d
    }
  }
  if (count === 0) return { step: 0, factor: NaN }
  const finest = FINEST * total / count
  const remainders = new Float64Array(count)
  for (let candidate = smallest; candidate > finest;) {
    const step = refine(changes, count, candidate)
    let off = 0
    for (let i = 0; i < count; i++) {
      const remainder = Math.abs(changes[i] - step * Math.round(changes[i] / step))
      if (remainder > OFF_GRID * step) remainders[off++] = remainder
    }
    if (off <= (1 - ON_GRID) * count) return { step, factor: step / Math.sqrt(variance(known)) }
    candidate = select(remainders.subarray(0, off), off >> 1)
  }
  return { step: 0, factor: 0 }
}

/** Mean step by the changes of at most 20 candidates; the candidate when there are none. */
function refine(changes: Float64Array, count: number, candidate: number): number {
  let sum = 0
  let steps = 0
  for (let i = 0; i < count; i++) {
    const k = Math.round(changes[i] / candidate)
    if (k <= 20 && Math.abs(changes[i] / candidate - k) <= OFF_GRID) {
      sum += changes[i]
      steps += k
    }
  }
  return steps > 0 ? sum / steps : candidate
}
