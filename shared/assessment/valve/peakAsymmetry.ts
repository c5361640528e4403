import { signRuns } from '../oscillation/signRuns'
import { insufficient, type Insufficient } from '../types'

export interface PeakAsymmetry {
  /** area from crossing to peak over area from peak to crossing, mean over half-cycles; about 1 symmetric, above it sticking */
  ratio: number
  median: number
  halfCycles: number
}

const FEWEST = 6

/**
 * Asymmetry of the half-cycles of the control error: behind a sticking valve the error of a self-regulating process rises
 * slowly (exponentially) to its peak and falls fast. The peak sample is shared half and half; first and last half-cycle
 * are left out. O(n).
 *
 * Domain: detected oscillation, self-regulating process (1 on integrating ones whatever the valve does).
 * @param error control error about zero, finite, noise taken off, length n
 * Source: Singhal, Salsbury 2005, "A simple method for detecting valve stiction in oscillating control loops".
 * Fixture: fixtures/reference/stiction.json.
 */
export function peakAsymmetry(error: Float64Array): PeakAsymmetry | Insufficient {
  const { edges } = signRuns(error)
  const ratios: number[] = []
  for (let run = 1; run + 2 < edges.length; run++) {
    const a = edges[run], b = edges[run + 1]
    let peak = a
    for (let t = a; t < b; t++) if (Math.abs(error[t]) > Math.abs(error[peak])) peak = t
    let before = Math.abs(error[peak]) / 2, after = before
    for (let t = a; t < peak; t++) before += Math.abs(error[t])
    for (let t = peak + 1; t < b; t++) after += Math.abs(error[t])
    if (after > 0) ratios.push(before / after)
  }
  if (ratios.length < FEWEST) return insufficient(`${ratios.length} whole half-cycles, ${FEWEST} are needed`)
  const sorted = [...ratios].sort((p, q) => p - q), middle = sorted.length >> 1
  return {
    ratio: ratios.reduce((s, r) => s + r, 0) / ratios.length,
    median: sorted.length % 2 ? sorted[middle] : (sorted[middle - 1] + sorted[middle]) / 2,
    halfCycles: ratios.length,
  }
}
