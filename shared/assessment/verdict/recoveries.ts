/**
 * How the loop comes back from upsets: recoveries after loads, with idle and area index on them. Set-point moves are cut out.
 *
 * Source: Hägglund 1999 (idle index, cut at 5 % of the peak), Visioli 2005 (area index); which stretches are looked at is ours.
 */
import { isInsufficient } from '../types'
import type { AnalysisSeries } from '../preparation/analysisSeries'
import { areaIndex } from '../response/areaIndex'
import { idleIndex } from '../response/idleIndex'
import { loadStepRecoveries } from '../response/loadStepRecoveries'

export interface Recoveries {
  count: number
  /** share that came back without swinging, but slower than the settling horizon */
  slowShare: number
  /** median time to a tenth of the peak over the settling horizon */
  recoveryOverSettling: number
  /** median swing back over the peak */
  swingBack: number
  idleIndex: number
  areaIndex: number
}

const MOST = 60

/**
 * @param noise standard deviation of the error's noise on the series
 * @param processSign sign of the process gain
 */
export function recoveries(series: AnalysisSeries, settlingS: number, noise: number, processSign: 1 | -1, pvSpan: number): Recoveries | null {
  const { intervalS, op } = series
  const e = new Float64Array(series.error.length).fill(NaN)
  for (const s of series.segments) for (let i = s.begin; i < s.end; i++) e[i] = series.error[i]
  if (series.sp) {
    // from a set-point move on the error is the move's; a horizon later it is the loop's own again
    const after = Math.ceil((3 * settlingS) / intervalS)
    let moves = 0
    for (let i = 1; i < e.length; i++) if (Math.abs(series.sp[i] - series.sp[i - 1]) > 1e-6 * pvSpan) moves++
    if (moves < e.length / 20) {
      for (let i = 1; i < e.length; i++) {
        if (Math.abs(series.sp[i] - series.sp[i - 1]) > 1e-6 * pvSpan) e.fill(NaN, i, i + after)
      }
    }
  }
  let count = 0
  let mean = 0
  for (let i = 0; i < e.length; i++) if (e[i] === e[i]) { mean += e[i]; count++ }
  if (count < 64) return null
  mean /= count
  let square = 0
  for (let i = 0; i < e.length; i++) if (e[i] === e[i]) square += (e[i] - mean) ** 2
  const deviation = Math.sqrt(square / count)
  const band = Math.max(3 * noise, 0.5 * deviation)
  if (!(band > 0)) return null
  const found = loadStepRecoveries(e, { sampleIntervalS: intervalS, settlingS, band }).slice(0, MOST)
  if (found.length < 3) return null
  const idle: number[] = []
  const area: number[] = []
  for (const r of found) {
    if (!op) break
    let end = r.peakAt
    while (end < r.to && Math.abs(e[end]) > 0.05 * Math.abs(r.peak)) end++
    if (end - r.from >= 8) {
      const i = idleIndex(op.subarray(r.from, end), series.pv.subarray(r.from, end), processSign)
      if (!isInsufficient(i)) idle.push(i.index)
    }
    const last = Math.min(op.length, r.to + (r.to - r.from))
    if (last - r.from >= 8 && isWhole(op, r.from, last)) {
      const a = areaIndex(op.subarray(r.from, last), { sampleIntervalS: intervalS })
      if (!isInsufficient(a)) area.push(a.index)
    }
  }
  const known = found.filter(r => r.recoveryS !== null)
  return {
    count: found.length,
    slowShare: found.filter(r => r.slow).length / found.length,
    recoveryOverSettling: median(known.map(r => r.recoveryS! / settlingS)),
    swingBack: median(found.map(r => Math.abs(r.swingBack))),
    idleIndex: median(idle),
    areaIndex: median(area),
  }
}

function isWhole(x: Float64Array, from: number, to: number): boolean {
  for (let i = from; i < to; i++) if (x[i] !== x[i]) return false
  return true
}

function median(values: number[]): number {
  if (!values.length) return NaN
  const s = [...values].sort((a, b) => a - b)
  return s.length % 2 ? s[s.length >> 1] : (s[(s.length >> 1) - 1] + s[s.length >> 1]) / 2
}
