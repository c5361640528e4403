import type { ClosedLoopResponse } from './simulateClosedLoop'

export interface ResponseFigures {
  /** Integral of |SP - PV|, PV unit x s. */
  iae: number
  /** Per cent of the set-point change; NaN when there was none. */
  overshootPercent: number
  /** s from the last change of SP (or the begin) until PV stays within the band; Infinity when it does not. */
  settlingTime: number
  /** Largest distance of PV from SP after the begin, PV unit. */
  peakDeviation: number
  /** Largest distance of OP from its start, OP unit, signed. */
  peakOutputChange: number
  /** Sum of |change of OP|, OP unit. */
  outputTravel: number
}

/**
 * Figures of a simulated response, on PV without measurement noise.
 * @param response evenly spaced
 * @param band half width of the settling band; 2 % of the set-point change when left out, or of the peak deviation when there was none
 * @throws RangeError when the response has fewer than 3 samples
 * Source: definitions; IAE by the trapezoid rule split at the zero crossings. Fixture: fixtures/reference/tuning.json.
 */
export function responseFigures(response: ClosedLoopResponse, band?: number): ResponseFigures {
  const { time, pv, sp, op } = response
  const n = pv.length
  if (n < 3) throw new RangeError(`responseFigures: at least 3 samples are needed, got ${n}`)
  const h = time[1] - time[0]
  // A loop at rest starts with PV at the old set point, also when the step falls on time 0.
  const change = sp[n - 1] - pv[0]
  let iae = 0
  let travel = 0
  let peakOutputChange = 0
  let peakDeviation = 0
  let from = 0
  for (let k = 1; k < n; k++) {
    if (sp[k] !== sp[k - 1]) from = k
    // At a step of SP the error of this interval is the one before the step.
    const before = sp[k] - pv[k - 1] + (sp[k - 1] - sp[k])
    const after = sp[k - 1] - pv[k]
    iae += before * after < 0 ? h / 2 * (before * before + after * after) / Math.abs(before - after) : h / 2 * (Math.abs(before) + Math.abs(after))
    travel += Math.abs(op[k] - op[k - 1])
    if (Math.abs(op[k] - op[0]) > Math.abs(peakOutputChange)) peakOutputChange = op[k] - op[0]
    peakDeviation = Math.max(peakDeviation, Math.abs(sp[k] - pv[k]))
  }
  let overshoot = 0
  if (change !== 0) {
    let best = from
    for (let k = from; k < n; k++) if ((pv[k] - sp[n - 1]) / change > (pv[best] - sp[n - 1]) / change) best = k
    overshoot = (pv[best] - sp[n - 1]) / change
    // The top lies between samples: parabola through three of them.
    if (best > 0 && best + 1 < n) {
      const curvature = pv[best - 1] - 2 * pv[best] + pv[best + 1]
      if (curvature * change < 0) overshoot = (pv[best] - (pv[best - 1] - pv[best + 1]) ** 2 / (8 * curvature) - sp[n - 1]) / change
    }
    overshoot = Math.max(0, overshoot * 100)
  }
  const width = band ?? 0.02 * (change !== 0 ? Math.abs(change) : peakDeviation)
  let last = n - 1
  while (last >= from && Math.abs(sp[n - 1] - pv[last]) <= width) last--
  return {
    iae, overshootPercent: change === 0 ? NaN : overshoot,
    settlingTime: last === n - 1 ? Infinity : Math.max(0, (last + 1 - from) * h),
    peakDeviation, peakOutputChange, outputTravel: travel,
  }
}
