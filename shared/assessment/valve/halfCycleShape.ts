import { signRuns } from '../oscillation/signRuns'
import { insufficient, type Insufficient } from '../types'

export interface HalfCycleShape {
  /** sine error / (sine error + triangle error): >= 0.6 triangular (sticking), <= 0.4 sinusoidal */
  index: number
  /** mean square errors of the two fits */
  sineError: number
  triangleError: number
  halfCycles: number
}

const FEWEST = 6
/** Half-cycles longer than this get their peak looked for on a coarser grid. */
const FINEST = 160

/**
 * Shape of the half-cycles, sine against triangle, by least squares: the sine through the interpolated zero crossings with
 * free amplitude, the triangle with free peak height at the best sample. First and last half-cycle are left out.
 *
 * Domain: a detected oscillation, at least 6 whole half-cycles; white noise alone gives 0.66, so never without detection.
 * Look at the output on self-regulating processes, at the process variable on integrating ones.
 * @param signal oscillation about zero, finite, slow part and noise taken off, length n
 * @returns insufficient with fewer half-cycles, or on a signal that both fit exactly
 * Source: He, Wang, Pottmann, Qin 2007, "A curve fitting method for detecting valve stiction in oscillating control loops";
 * details of the fit are ours. Fixture: fixtures/reference/stiction.json. O(n x length of a half-cycle).
 */
export function halfCycleShape(signal: Float64Array): HalfCycleShape | Insufficient {
  const { edges } = signRuns(signal)
  let sine = 0, triangle = 0, samples = 0, halfCycles = 0
  for (let run = 1; run + 2 < edges.length; run++) {
    const a = edges[run], b = edges[run + 1]
    const start = a - 1 + signal[a - 1] / (signal[a - 1] - signal[a])
    const end = b - 1 + signal[b - 1] / (signal[b - 1] - signal[b])
    let sy = 0, ss = 0, yy = 0
    for (let t = a; t < b; t++) {
      const s = Math.sin(Math.PI * (t - start) / (end - start))
      sy += s * signal[t]
      ss += s * s
      yy += signal[t] ** 2
    }
    let best = Infinity
    const stride = Math.ceil((b - a) / FINEST)
    for (let peak = a; peak < b; peak += stride) {
      if (peak <= start || peak >= end) continue
      let gy = 0, gg = 0
      for (let t = a; t < b; t++) {
        const g = t <= peak ? (t - start) / (peak - start) : (end - t) / (end - peak)
        gy += g * signal[t]
        gg += g * g
      }
      best = Math.min(best, yy - gy * gy / gg)
    }
    if (!Number.isFinite(best)) continue
    sine += Math.max(0, yy - sy * sy / ss)
    triangle += Math.max(0, best)
    samples += b - a
    halfCycles++
  }
  if (halfCycles < FEWEST) return insufficient(`${halfCycles} whole half-cycles, ${FEWEST} are needed`)
  if (!(sine + triangle > 0)) return insufficient('both shapes fit exactly')
  return { index: sine / (sine + triangle), sineError: sine / samples, triangleError: triangle / samples, halfCycles }
}
