export interface LoadStepRecovery {
  /** sample at which the error leaves the quiet band */
  from: number
  /** sample at which it is back (half of the band), or the end of the record */
  to: number
  /** largest deviation, with its sign, unit of the error */
  peak: number
  /** sample of the peak */
  peakAt: number
  /** largest deviation to the other side within one more duration, over the peak: 0 one-sided, above about 0.2 it swings */
  swingBack: number
  /** s from the peak until a tenth of it is left; null when the record ends before */
  recoveryS: number | null
  /** recovered without swinging back, but slower than the settling horizon */
  slow: boolean
}

/**
 * Recoveries after load upsets: stretches in which the error leaves its quiet band, peaks and comes back. Slow and one-sided
 * ones are the mark of sluggish tuning.
 *
 * Domain: normal mode, set point constant (set-point moves cut out as NaN), no detected oscillation.
 * @param error control error about zero, regular samples, noise taken off, NaN where missing, length n
 * @param options sampleIntervalS > 0, settlingS > 0; band > 0: half width of the quiet band (three noise levels is usual)
 * @returns ascending in time; only peaks of at least twice the band. O(n).
 * Source: ours; usual meaning of recovery time (common practice, no source). Checked on closed-form responses.
 */
export function loadStepRecoveries(error: Float64Array, { sampleIntervalS, settlingS, band }: { sampleIntervalS: number, settlingS: number, band: number }): LoadStepRecovery[] {
  for (const [name, value] of Object.entries({ sampleIntervalS, settlingS, band })) if (!(value > 0)) throw new RangeError(`${name} must be above 0, got ${value}`)
  const found: LoadStepRecovery[] = []
  for (let i = 0; i < error.length; i++) {
    if (!(Math.abs(error[i]) > band)) continue
    const from = i, side = Math.sign(error[i])
    let to = i, peakAt = i
    while (to < error.length && side * error[to] > band / 2) {
      if (Math.abs(error[to]) > Math.abs(error[peakAt])) peakAt = to
      to++
    }
    i = to
    const peak = error[peakAt]
    if (Math.abs(peak) < 2 * band) continue
    let back = 0
    for (let j = to; j < Math.min(error.length, to + (to - from)); j++) if (-side * error[j] > back) back = -side * error[j]
    let left = peakAt
    while (left < to && Math.abs(error[left]) > 0.1 * Math.abs(peak)) left++
    const complete = to < error.length && error[to] === error[to]
    const recoveryS = left < to || complete ? (left - peakAt) * sampleIntervalS : null
    const swingBack = back / Math.abs(peak)
    found.push({ from, to, peak, peakAt, swingBack, recoveryS, slow: swingBack < 0.2 && (recoveryS ?? (to - peakAt) * sampleIntervalS) > settlingS })
  }
  return found
}
