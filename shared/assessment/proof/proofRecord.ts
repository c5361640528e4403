import { FROZEN, OFF_NORMAL, type PreparedRecord } from '../preparation/prepareRecord'
import type { TimeSpan } from '../types'
import type { ProofRecord } from './compareWindows'

/** One hour of the ledger: its begin, epoch ms, and its letter. */
export interface LedgerHour { fromMs: number, letter: string }

const HOUR_MS = 3_600_000
const LOST = 'xmuho'
/** Hours whose samples say nothing about the controller: no data, declared outage, doubtful sensor. */
const SILENT = '.dx'

/**
 * One loop over one window, averaged into bins for `compareWindows`. Only slots in a normal mode with SP and PV count,
 * outside hours without data, of outages and of a doubtful sensor; a bin counts when at least half of it does.
 *
 * @param prepared native record that covers the window
 * @param window [fromMs, toMs); bins begin at fromMs, a last incomplete bin is left out
 * @param hours ledger of the window; hours that reach beyond it are not counted as lost or kept
 * @param binS length of a bin, s, at least the native interval
 * @throws RangeError on a window without length or bins that are too short
 * Source: our definitions.
 */
export function proofRecord(prepared: PreparedRecord, window: TimeSpan, hours: readonly LedgerHour[], binS: number): ProofRecord {
  if (!(window.toMs > window.fromMs)) throw new RangeError('proofRecord: the window must end after it begins')
  if (!(binS > 0) || binS < prepared.intervalS) throw new RangeError(`proofRecord: bins of ${binS} s at an interval of ${prepared.intervalS} s`)
  const bins = Math.floor((window.toMs - window.fromMs) / (binS * 1000))
  const absolute = new Float64Array(bins)
  const error = new Float64Array(bins)
  const square = new Float64Array(bins)
  const count = new Int32Array(bins)
  // in a zone that is half an hour off, hours do not begin with those of UTC
  const phase = hours.length ? hours[0].fromMs % HOUR_MS : 0
  const hourOf = (ms: number) => Math.floor((ms - phase) / HOUR_MS)
  const silent = new Set(hours.filter(h => SILENT.includes(h.letter)).map(h => hourOf(h.fromMs)))
  let spSum = 0
  let spCount = 0
  let opSum = 0
  let opCount = 0
  for (let i = 0; i < prepared.n; i++) {
    const at = prepared.t[i]
    const bin = Math.floor((at - window.fromMs) / (binS * 1000))
    if (bin < 0 || bin >= bins || (prepared.flags[i] & (OFF_NORMAL | FROZEN)) !== 0 || silent.has(hourOf(at))) continue
    const sp = prepared.sp ? prepared.sp[i] : NaN
    const op = prepared.op ? prepared.op[i] : NaN
    if (sp === sp) { spSum += sp; spCount++ }
    if (op === op) { opSum += op; opCount++ }
    const e = prepared.error ? prepared.error[i] : NaN
    if (e !== e) continue
    absolute[bin] += Math.abs(e)
    error[bin] += e
    square[bin] += e * e
    count[bin]++
  }
  const need = Math.max(1, binS / prepared.intervalS / 2)
  for (let b = 0; b < bins; b++) {
    for (const series of [absolute, error, square]) series[b] = count[b] >= need ? series[b] / count[b] : NaN
  }
  const inside = hours.filter(h => h.fromMs >= window.fromMs && h.fromMs + HOUR_MS <= window.toMs)
  return {
    absolute, error, square, binS, setpointMean: spCount ? spSum / spCount : NaN, outputMean: opCount ? opSum / opCount : NaN,
    lostHours: Float64Array.from(inside, h => LOST.includes(h.letter) ? 1 : h.letter === 's' ? 0 : NaN),
  }
}
