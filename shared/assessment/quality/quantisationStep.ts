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

/**
 * Resolution of a recorded signal: the largest step of which the changes between neighbours are whole multiples.
 *
 * The smallest change that occurs is the first candidate, then its half and third (a record may contain changes of 2
 * and 3 steps only). A candidate is refined on the short changes before the long ones are held to it, because a long
 * change carries the candidate's own rounding many times over.
 *
 * @param x any length, NaN allowed (missing)
 * @returns step and its ratio to the standard deviation (quantisation factor)
 * Source: N. F. Thornhill, M. A. A. S. Choudhury, S. L. Shah (2004) The impact of compression on data-driven process
 * analyses, J. Process Control 14:389-398 (factor step / standard deviation, from memory); the grid test is ours.
 * Reference: fixtures/reference/compression.json (quant_*). Cost O(n).
 */
export function quantisationStep(x: Float64Array): QuantisationStep {
  const known = x.filter(v => v - v === 0)
  const changes = new Float64Array(known.length)
  let count = 0
  let smallest = Infinity
  for (let i = 1; i < known.length; i++) {
    const d = Math.abs(known[i] - known[i - 1])
    // smaller ones are the rounding of two decimal texts, as in 0.3 - 0.2 against 0.1
    if (d > 1e-12 * Math.max(Math.abs(known[i]), Math.abs(known[i - 1]))) {
      changes[count++] = d
      if (d < smallest) smallest = d
    }
  }
  if (count === 0) return { step: 0, factor: NaN }
  for (const parts of [1, 2, 3]) {
    let sum = 0
    let steps = 0
    for (let i = 0; i < count; i++) {
      const k = Math.round(changes[i] * parts / smallest)
      if (k <= 20 && Math.abs(changes[i] * parts / smallest - k) <= OFF_GRID) {
        sum += changes[i]
        steps += k
      }
    }
    if (steps === 0) continue
    const step = sum / steps
    let good = 0
    for (let i = 0; i < count; i++) {
      const k = changes[i] / step
      if (Math.abs(k - Math.round(k)) <= OFF_GRID) good++
    }
    if (good >= ON_GRID * count) return { step, factor: step / Math.sqrt(variance(known)) }
  }
  return { step: 0, factor: 0 }
}
