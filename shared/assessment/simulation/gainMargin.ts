import type { IdealPid, ProcessModel } from '../../control/types'

/**
 * Gain margin of a sampled loop and the period it would hunt at: first crossing of -180 degrees of process, PID (derivative
 * filter of factor 10), measurement filter, and half a step of hold as extra dead time.
 *
 * Good to about 1 % while the period is at least ten steps. O(grid).
 * @param controllerGain in OP unit per PV unit, the magnitude; the sign of the process gain is not looked at
 * @returns margin (> 0) and periodS; Infinity and NaN when the phase never crosses
 * Source: K. J. Åström, R. M. Murray (2008) Feedback Systems, 9.3.
 */
export function gainMargin(process: ProcessModel, pid: IdealPid, stepS: number): { margin: number, periodS: number } {
  const N = pid.derivativeFilterFactor ?? 10
  const filter = pid.measurementFilterTime ?? 0
  const delay = process.deadTime + stepS / 2
  const { integralTime: Ti, derivativeTime: Td } = pid
  const at = (w: number) => {
    // 1 + 1/(jw Ti) + jw Td / (1 + jw Td/N)
    const d = w * Td
    const denominator = 1 + (d / N) ** 2
    const re = 1 + d * d / N / denominator
    const im = d / denominator - (Ti === Infinity ? 0 : 1 / (w * Ti))
    let phase = Math.atan2(im, re) - w * delay - Math.atan(w * filter)
    let size = pid.controllerGain * Math.abs(process.processGain) * Math.hypot(re, im) / Math.hypot(1, w * filter)
    if (process.kind === 'integrating') { phase -= Math.PI / 2; size /= w }
    else {
      phase -= Math.atan(w * process.timeConstant)
      size /= Math.hypot(1, w * process.timeConstant)
      if (process.kind === 'sopdt') {
        phase -= Math.atan(w * process.timeConstant2)
        size /= Math.hypot(1, w * process.timeConstant2)
      }
    }
    return { phase: phase + Math.PI, size }
  }
  const lag = process.kind === 'integrating' ? 0 : process.timeConstant
  let low = 0
  let high = 0
  // begin above the slow crossing that an integrating process with too short an integral time has
  for (let w = 0.02 / (delay + filter + 0.02 * lag); w < 20 / delay; w *= 1.05) {
    if (at(w).phase > 0) low = w
    else if (low > 0) { high = w; break }
  }
  if (high === 0) return { margin: Infinity, periodS: NaN }
  for (let i = 0; i < 40; i++) {
    const middle = (low + high) / 2
    if (at(middle).phase > 0) low = middle
    else high = middle
  }
  return { margin: 1 / at(low).size, periodS: 2 * Math.PI / low }
}
