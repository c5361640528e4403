import { bandPass } from '../spectrum/bandPass'
import { zeroCrossings } from '../oscillation/zeroCrossings'

/**
 * Begins of the cycles of an oscillation of known period: upward zero crossings of the signal within a factor of 1.7 of its
 * frequency. Cycles shorter than half or longer than one and a half periods are no cycles and cut the list.
 * @param signal finite, length n >= 4
 * @param periodSamples samples, >= 4
 * @returns pairs [begin, end) of single cycles, samples, fractional, ascending
 * O(n log n). Source: definition.
 */
export function cycles(signal: Float64Array, periodSamples: number): [number, number][] {
  if (!(periodSamples >= 4)) throw new RangeError(`periodSamples must be at least 4, got ${periodSamples}`)
  if (signal.length < 2 * periodSamples) return []
  const band = bandPass(signal, { sampleIntervalS: 1, lowHz: 1 / (1.7 * periodSamples), highHz: Math.min(0.5, 1.7 / periodSamples) })
  const up = [...zeroCrossings(band)].filter(at => band[Math.floor(at)] <= 0)
  const found: [number, number][] = []
  for (let i = 0; i + 1 < up.length; i++) {
    const length = up[i + 1] - up[i]
    if (length > 0.5 * periodSamples && length < 1.5 * periodSamples) found.push([up[i], up[i + 1]])
  }
  return found
}
