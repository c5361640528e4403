import type { SetpointResponse } from '../types'

export interface SetpointResponseOptions {
  /** s, > 0 */
  sampleIntervalS: number
  /** settling horizon, s: quiet this long before, watched three times as long after */
  settlingS: number
  /** standard deviation of the measurement noise, PV unit */
  noiseLevel: number
  t0Ms?: number
}

/** A move counts from this many noise levels on. */
const NOISES = 3
/** Ramps up to this share of the settling horizon count as one step. */
const RAMP = 0.2

/**
 * Responses to steps of the set point, the failed ones too.
 *
 * A step is a move of more than three noise levels within a fifth of the settling horizon, with the set point quiet for one
 * horizon before and the response watched until the next move or three horizons. Overshoot over the size of the step, rise
 * from 10 to 90 %, settling into 2 % of the step (never tighter than two noise levels), decay ratio (second over first
 * overshoot), integral of the absolute error. `settled` false: it never stayed in the band. Figures that the record does
 * not show are null. Overshoot and rise are read from a mean over a fortieth of the horizon, against noise.
 * @param sp set point, regular samples, NaN where missing, length n
 * @param pv process variable, likewise
 * @returns ascending in time. O(n).
 * Source: usual definitions (Åström, Hägglund 2006, Advanced PID Control, section 4.2). Checked on closed forms.
 */
export function findSetpointResponses(sp: Float64Array, pv: Float64Array, options: SetpointResponseOptions): SetpointResponse[] {
  const { sampleIntervalS, settlingS, noiseLevel, t0Ms = 0 } = options
  if (sp.length !== pv.length) throw new RangeError(`sp and pv must have one length, got ${sp.length} and ${pv.length}`)
  for (const [name, value] of Object.entries({ sampleIntervalS, settlingS })) if (!(value > 0)) throw new RangeError(`${name} must be above 0, got ${value}`)
  if (!(noiseLevel >= 0)) throw new RangeError(`noiseLevel must be >= 0, got ${noiseLevel}`)
  const horizon = Math.max(4, Math.round(settlingS / sampleIntervalS))
  const ramp = Math.max(1, Math.round(RAMP * horizon))
  const smooth = trailingMean(pv, Math.max(1, Math.round(horizon / 40)))
  const responses: SetpointResponse[] = []
  let lastMove = 0
  for (let i = 1; i < sp.length; i++) {
    if (!moves(sp, i, noiseLevel)) continue
    const quiet = i - lastMove >= horizon || lastMove === 0 && i >= horizon
    let end = i
    while (end + 1 < sp.length && end - i < ramp && moves(sp, end + 1, noiseLevel)) end++
    lastMove = end
    const from = sp[i - 1], to = sp[end]
    let until = end + 1
    while (until < sp.length && until - i < 3 * horizon && !moves(sp, until, noiseLevel)) until++
    if (quiet && Math.abs(to - from) > Math.max(NOISES * noiseLevel, 1e-9 * Math.abs(from)) && until - i >= horizon) {
      responses.push(measure(pv, smooth, { from, to, begin: i, until, noiseLevel, sampleIntervalS, atMs: t0Ms + i * sampleIntervalS * 1000 }))
    }
    i = end
  }
  return responses
}

/** A change of the set point above its own rounding; a tenth of the noise is not a move that anyone asked for. */
function moves(sp: Float64Array, i: number, noiseLevel: number): boolean {
  return Math.abs(sp[i] - sp[i - 1]) > Math.max(0.1 * noiseLevel, 1e-9 * Math.abs(sp[i]))
}

function trailingMean(x: Float64Array, width: number): Float64Array {
  const out = new Float64Array(x.length)
  for (let i = 0; i < x.length; i++) {
    // centred, so that times are not late
    let sum = 0, count = 0
    for (let j = Math.max(0, i - (width >> 1)); j < Math.min(x.length, i - (width >> 1) + width); j++) if (x[j] === x[j]) { sum += x[j]; count++ }
    out[i] = count ? sum / count : Number.NaN
  }
  return out
}

function measure(pv: Float64Array, smooth: Float64Array, { from, to, begin, until, noiseLevel, sampleIntervalS, atMs }: {
  from: number, to: number, begin: number, until: number, noiseLevel: number, sampleIntervalS: number, atMs: number
}): SetpointResponse {
  const size = to - from
  const part = (i: number) => (smooth[i] - from) / size
  const band = Math.max(0.02 * Math.abs(size), 2 * noiseLevel)
  let iae = 0, missing = 0, tenth: number | null = null, ninety: number | null = null, lastOutside = begin - 1
  const crossing = (i: number, level: number) => i > begin && part(i - 1) < level ? i - 1 + (level - part(i - 1)) / (part(i) - part(i - 1)) : i
  for (let i = begin; i < until; i++) {
    if (pv[i] !== pv[i]) { missing++; continue }
    iae += Math.abs(to - pv[i]) * sampleIntervalS
    if (tenth === null && part(i) >= 0.1) tenth = crossing(i, 0.1)
    if (ninety === null && part(i) >= 0.9) ninety = crossing(i, 0.9)
    if (Math.abs(smooth[i] - to) > band) lastOutside = i
  }
  const length = until - begin
  // it must have stayed inside for a tenth of what was watched
  const settled = until - 1 - lastOutside >= 0.1 * length
  // overshoots: extremes beyond the new set point, between crossings of it
  const peaks: number[] = []
  let peak = 0
  for (let i = begin; i < until; i++) {
    const over = part(i) - 1
    if (over > 0) peak = Math.max(peak, over)
    else if (peak > 0 && over < 0) { if (peak * Math.abs(size) > noiseLevel) peaks.push(peak); peak = 0 }
  }
  if (peak * Math.abs(size) > noiseLevel) peaks.push(peak)
  const gaps = missing > 0.1 * length
  return {
    atMs, from, to,
    overshootFraction: gaps ? null : peaks[0] ?? 0,
    riseTimeS: gaps || tenth === null || ninety === null ? null : (ninety - tenth) * sampleIntervalS,
    settlingTimeS: gaps || !settled ? null : (lastOutside + 1 - begin) * sampleIntervalS,
    decayRatio: !gaps && peaks.length > 1 ? peaks[1] / peaks[0] : null,
    iae: gaps ? null : iae,
    settled: !gaps && settled,
  }
}
