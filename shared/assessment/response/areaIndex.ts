import { insufficient, type Insufficient } from '../types'

export interface AreaIndexResult {
  /** largest inner area over the sum of all but the first, 1 with fewer than three areas; > 0.7 sluggish, < 0.35 oscillating */
  index: number
  /** unsigned areas between crossings of the final output, unit of op x s */
  areas: number[]
}

/** Below this share of the largest deviation the output counts as settled. */
const SETTLED = 0.01

/**
 * Area index after a load step: areas of the output about its final value, between its crossings of that value.
 *
 * Domain: a clear load step, response complete, noise taken off. Our reading of the areas at both ends: from the step to the
 * first crossing, and from the last crossing to where 1 % of the largest deviation is left. O(n).
 * @param op controller output from the step on, finite, length n
 * @param options sampleIntervalS > 0; finalOutput: the last sample unless given
 * @returns insufficient when the output does not move
 * Source: Visioli 2005, "Method for proportional-integral controller tuning assessment". Fixture: fixtures/reference/idle.json.
 */
export function areaIndex(op: Float64Array, { sampleIntervalS, finalOutput = op[op.length - 1] }: { sampleIntervalS: number, finalOutput?: number }): AreaIndexResult | Insufficient {
  if (!(sampleIntervalS > 0)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  let largest = 0
  for (const value of op) largest = Math.max(largest, Math.abs(value - finalOutput))
  if (!(largest > 0)) return insufficient('the output does not move')
  let settled = op.length
  while (settled > 0 && !(Math.abs(op[settled - 1] - finalOutput) > SETTLED * largest)) settled--
  const areas = [0]
  for (let i = 0; i < settled; i++) {
    const value = op[i] - finalOutput
    if (i && value * (op[i - 1] - finalOutput) < 0) areas.push(0)
    areas[areas.length - 1] += Math.abs(value) * sampleIntervalS
  }
  const rest = areas.slice(1).reduce((s, a) => s + a, 0)
  return { index: areas.length < 3 ? 1 : Math.max(...areas.slice(1, -1)) / rest, areas }
}
