import { insufficient, type Insufficient } from '../types'
import { harmonics } from './harmonics'

export interface AmplitudeConstancy {
  /** sd over mean of the amplitude from cycle to cycle: near 0 bounded limit cycle or line; 0.52 noise through a resonance */
  amplitudeVariation: number
  /** sd over mean of the length of the cycles */
  periodVariation: number
  cycles: number
}

/**
 * How steady an oscillation is from cycle to cycle. A limit cycle of a sticking valve keeps its amplitude while its period
 * shifts with the load; a line carried in keeps both; noise through a lightly damped loop wanders in amplitude (Rayleigh
 * distributed: sd / mean = sqrt(4 / pi - 1) = 0.52).
 *
 * Domain: detected oscillation, at least 8 whole cycles, 8 samples a period.
 * @param signal finite, length n
 * Source: ours; the value for noise is the Rayleigh distribution's. O(n log n).
 */
export function amplitudeConstancy(signal: Float64Array, periodSamples: number): AmplitudeConstancy | Insufficient {
  const found = harmonics(signal, periodSamples)
  if ('status' in found) return found
  if (found.perCycle.length < 8) return insufficient(`${found.perCycle.length} whole cycles, 8 are needed`)
  return { amplitudeVariation: variation(found.perCycle), periodVariation: variation(found.lengths), cycles: found.perCycle.length }
}

function variation(x: Float64Array): number {
  const mean = x.reduce((s, v) => s + v, 0) / x.length
  return Math.sqrt(x.reduce((s, v) => s + (v - mean) ** 2, 0) / (x.length - 1)) / mean
}
