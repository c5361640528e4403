/**
 * The week ledger: exactly one state for each hour, the first that applies.
 *
 * `noData` less than half of the hour received; `down` more than half inside declared outages; `sensor` PV frozen, out
 * of range or bad for more than half; `manual` outside the normal modes for more than half; `saturated` OP at a limit
 * for more than half; `hunting` inside detected oscillations for more than half; `offTarget` mean absolute error above
 * the tolerance; `steady` none of these. All shares are of the hour itself, not of its usable part. A sample lasts to
 * the next one, at most one native interval unless the next comes within half an interval more; it is split at the
 * hour's edge. A sample is received when any of its signals is a number: a PV that is missing while SP or OP arrive is a
 * bad reading. Without SP no hour can be `offTarget`.
 *
 * Cost O(samples + hours). Source: our definition (the ledger).
 *
 * @param prepared native record with FROZEN already marked
 * @param hunting spans in which the loop oscillates; may overlap
 * @param outages declared outages of the loop's area; may overlap
 * @param tolerance half width of the band, PV unit
 */
import { LEDGER_STATES, LOST_STATES, type LedgerState, type TimeSpan, type WeekFrame } from '../types'
import { AT_HIGH, AT_LOW, FROZEN, OFF_NORMAL, OUT_OF_RANGE, RECEIVED, type PreparedRecord } from '../preparation/prepareRecord'
import { ribbonOf } from './ribbon'

export interface Ledger {
  /** index into LEDGER_STATES per hour */
  states: Uint8Array
  ribbon: string
  hours: Record<LedgerState, number>
  lostHours: number
}

const STATE = Object.fromEntries(LEDGER_STATES.map((s, i) => [s, i])) as Record<LedgerState, number>

export function buildLedger(prepared: PreparedRecord, tolerance: number, week: WeekFrame, hunting: TimeSpan[], outages: TimeSpan[]): Ledger {
  const edges = week.hourEdges
  const count = edges.length - 1
  const received = new Float64Array(count)
  const sensor = new Float64Array(count)
  const manual = new Float64Array(count)
  const limit = new Float64Array(count)
  const errorTime = new Float64Array(count)
  const errorSum = new Float64Array(count)

  const { n, t, pv, error, flags } = prepared
  const dt = prepared.intervalS * 1000
  let h = 0
  for (let i = 0; i < n; i++) {
    const f = flags[i]
    let from = t[i]
    while (h < count - 1 && from >= edges[h + 1]) h++
    if ((f & RECEIVED) === 0) continue
    const next = i + 1 < n ? t[i + 1] : Infinity
    const to = next - from < 1.5 * dt ? next : from + dt
    const bad = (f & FROZEN) !== 0 || pv[i] !== pv[i] || (f & OUT_OF_RANGE) !== 0
    const e = error && !bad ? Math.abs(error[i]) : NaN
    if (to <= edges[h + 1]) {
      // nearly always: the sample lies within its hour
      const d = to - from
      received[h] += d
      if (bad) sensor[h] += d
      if (f !== RECEIVED) {
        if ((f & OFF_NORMAL) !== 0) manual[h] += d
        if ((f & (AT_LOW | AT_HIGH)) !== 0) limit[h] += d
      }
      if (e === e) {
        errorTime[h] += d
        errorSum[h] += d * e
      }
      continue
    }
    // a sample over the hour's edge is split
    for (let k = h; k < count && from < to; k++) {
      const end = to < edges[k + 1] ? to : edges[k + 1]
      const d = end - from
      received[k] += d
      if (bad) sensor[k] += d
      if ((f & OFF_NORMAL) !== 0) manual[k] += d
      if ((f & (AT_LOW | AT_HIGH)) !== 0) limit[k] += d
      if (e === e) {
        errorTime[k] += d
        errorSum[k] += d * e
      }
      from = end
    }
  }
  const down = overlapPerHour(outages, edges)
  const hunts = overlapPerHour(hunting, edges)

  const states = new Uint8Array(count)
  const hours = Object.fromEntries(LEDGER_STATES.map(s => [s, 0])) as Record<LedgerState, number>
  for (let k = 0; k < count; k++) {
    const half = (edges[k + 1] - edges[k]) / 2
    const more = (x: number) => x > half + 1e-3
    const state: LedgerState
      = received[k] < half - 1e-3 ? 'noData'
        : more(down[k]) ? 'down'
          : more(sensor[k]) ? 'sensor'
            : more(manual[k]) ? 'manual'
              : more(limit[k]) ? 'saturated'
                : more(hunts[k]) ? 'hunting'
                  : errorTime[k] > 0 && errorSum[k] / errorTime[k] > tolerance * (1 + 1e-9) ? 'offTarget'
                    : 'steady'
    states[k] = STATE[state]
    hours[state]++
  }
  const lostHours = LOST_STATES.reduce((sum, s) => sum + hours[s], 0)
  return { states, ribbon: ribbonOf(states), hours, lostHours }
}

/** Time (ms) of each hour that lies inside the union of the spans. */
function overlapPerHour(spans: TimeSpan[], edges: Float64Array): Float64Array {
  const count = edges.length - 1
  const time = new Float64Array(count)
  for (const s of mergeSpans(spans)) {
    for (let k = 0; k < count; k++) {
      const d = Math.min(s.toMs, edges[k + 1]) - Math.max(s.fromMs, edges[k])
      if (d > 0) time[k] += d
    }
  }
  return time
}

/** Union of spans, in order; spans of no length fall away. */
export function mergeSpans(spans: TimeSpan[]): TimeSpan[] {
  const sorted = spans.filter(s => s.toMs > s.fromMs).sort((a, b) => a.fromMs - b.fromMs)
  const merged: TimeSpan[] = []
  for (const s of sorted) {
    const last = merged[merged.length - 1]
    if (last && s.fromMs <= last.toMs) last.toMs = Math.max(last.toMs, s.toMs)
    else merged.push({ ...s })
  }
  return merged
}
