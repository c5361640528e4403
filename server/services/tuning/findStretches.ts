import { AT_HIGH, AT_LOW, OFF_NORMAL, prepareRecord, type PreparedRecord } from '../../../shared/assessment/preparation/prepareRecord'
import type { LoopRecord, LoopSetup, TimeSpan } from '../../../shared/assessment/types'
import type { StretchKind } from '../../../shared/types/tuning'

export interface Stretch {
  kind: StretchKind
  /** slots of the prepared record, [begin, end) */
  begin: number
  end: number
  /** slots before the first move, which may serve as history for the dead time */
  lead: number
  /** the move stands out from what PV does at rest, so that it and not the disturbances decides the fit */
  clear: boolean
  /** largest single move of the set point (in manual: of OP), share of its span; 0 for natural ones */
  size: number
  usable: boolean
  reason: string
  /** ranges, own units */
  pvMove: number
  opMove: number
}

const LEAST_SAMPLES = 60
const MOST_SAMPLES = 6000
const MOST_NATURAL = 3
const OP_MOVE_FRACTION = 0.005
const SP_MOVE_FRACTION = 0.005

/**
 * Stretches of a record that may carry a process model: around moves of the set point in a normal mode, around moves of
 * OP in manual, and the liveliest pieces of normal operation in between. Each says whether it is usable and why not.
 * A move counts from half a per cent of span. A stretch reaches from one settling horizon before its first move to three
 * after its last; moves closer together than that share a stretch. O(n).
 * @param record the prepared record of the time looked at
 * @param outages times that say nothing about the process
 * Source: common practice, no source; the fit itself decides what a stretch is worth.
 */
export function findStretches(record: PreparedRecord, setup: LoopSetup, outages: readonly TimeSpan[]): Stretch[] {
  const { n, op, sp, flags, intervalS } = record
  if (n === 0 || op === null || !(intervalS > 0)) return []
  const horizon = Math.max(20, Math.round(setup.settlingS / intervalS))
  const opSpan = setup.opHigh - setup.opLow
  const pvSpan = setup.pvHigh - setup.pvLow
  const found: Stretch[] = []
  const judge = (kind: StretchKind, begin: number, end: number, lead: number, size = 0) => { found.push({ kind, begin, end, lead, size, clear: kind !== 'natural' && standsOut(record.pv, begin + (lead >> 1), begin + lead, size * pvSpan), ...judged(record, setup, outages, begin, end) }) }

  for (const whole of record.stretches) {
    for (const [from, to, manual] of runs(flags, whole.begin, whole.end)) {
      // isolated samples between modes carry nothing, and naming each would bury the rest
      if (to - from < 20) continue
      const signal = manual ? op : setup.form === 'onOff' ? null : sp
      const moves = signal ? movesOf(signal, from, to, manual ? OP_MOVE_FRACTION * opSpan : SP_MOVE_FRACTION * pvSpan) : []
      const taken: [number, number][] = []
      for (let i = 0; i < moves.length;) {
        const begin = Math.max(from, taken.length ? taken[taken.length - 1][1] : from, moves[i] - horizon)
        let last = i
        while (last + 1 < moves.length && moves[last + 1] - moves[last] < 3 * horizon && moves[last + 1] + 3 * horizon - begin < MOST_SAMPLES) last++
        const end = Math.min(to, moves[last + 1] ?? to, moves[last] + 3 * horizon, begin + MOST_SAMPLES)
        // over three samples, as a short ramp is one move
        const size = Math.max(...moves.slice(i, last + 1).map(m => Math.abs(signal![Math.min(end - 1, m + 2)] - signal![m - 1]))) / (manual ? opSpan : pvSpan)
        judge(manual ? 'manualMove' : 'setpointMove', begin, end, moves[i] - begin, Number.isFinite(size) ? size : 0)
        taken.push([begin, end])
        i = last + 1
      }
      if (!manual) for (const [a, b] of between(taken, from, to)) pieces(a, b, horizon, setup.form === 'onOff' ? 1200 : MOST_SAMPLES).forEach(([begin, end]) => judge('natural', begin, end, 0))
    }
  }
  const natural = found.filter(s => s.kind === 'natural')
  // only the liveliest of what the loop does by itself; quiet pieces are every loop's daily life and need no list
  const liveliest = natural.filter(s => s.usable).sort((a, b) => b.opMove - a.opMove).slice(0, MOST_NATURAL)
  const shown = liveliest.length ? liveliest : natural.sort((a, b) => (b.end - b.begin) - (a.end - a.begin)).slice(0, 1)
  return [...found.filter(s => s.kind !== 'natural'), ...shown].sort((a, b) => a.begin - b.begin)
}

/** Five standard deviations of PV in the second half of the time before the move, when an earlier move has faded; the size of an OP move is taken as if the process gain were 1. */
function standsOut(pv: Float64Array, from: number, to: number, size: number): boolean {
  let [n, mean, squares] = [0, 0, 0]
  for (let i = from; i < to; i++) {
    if (pv[i] !== pv[i]) continue
    n++
    const d = pv[i] - mean
    mean += d / n
    squares += d * (pv[i] - mean)
  }
  return n > 10 && size > 5 * Math.sqrt(squares / n)
}

/** Runs of one kind of mode: [from, to, off normal]. */
function* runs(flags: Uint8Array, begin: number, end: number): Generator<[number, number, boolean]> {
  for (let from = begin; from < end;) {
    const manual = (flags[from] & OFF_NORMAL) !== 0
    let to = from + 1
    while (to < end && ((flags[to] & OFF_NORMAL) !== 0) === manual) to++
    yield [from, to, manual]
    from = to
  }
}

function movesOf(signal: Float64Array, from: number, to: number, least: number): number[] {
  const moves: number[] = []
  // against the value three samples back too, so that a short ramp counts as one move
  for (let i = from + 1; i < to; i++) if (Math.abs(signal[i] - signal[i - 1]) >= least || (i >= from + 3 && Math.abs(signal[i] - signal[i - 3]) >= least && moves[moves.length - 1] < i - 3)) moves.push(i)
  return moves
}

function between(taken: [number, number][], from: number, to: number): [number, number][] {
  const out: [number, number][] = []
  let at = from
  for (const [a, b] of taken) {
    if (a > at) out.push([at, a])
    at = Math.max(at, b)
  }
  if (to > at) out.push([at, to])
  return out
}

/** Pieces of about five horizons; of an on-off loop not so long that its switchings would have to be averaged away. */
function pieces(from: number, to: number, horizon: number, most: number): [number, number][] {
  const length = Math.min(most, Math.max(150, 5 * horizon))
  const count = Math.max(1, Math.floor((to - from) / length))
  return Array.from({ length: count }, (_, k) => [from + k * length, Math.min(to, from + (k + 1) * length)])
}

function judged({ pv, op, t, flags }: PreparedRecord, setup: LoopSetup, outages: readonly TimeSpan[], begin: number, end: number): Pick<Stretch, 'usable' | 'reason' | 'pvMove' | 'opMove'> {
  const n = end - begin
  let missing = 0
  let limited = 0
  let [pvLow, pvHigh, opLow, opHigh] = [Infinity, -Infinity, Infinity, -Infinity]
  for (let i = begin; i < end; i++) {
    if (!(pv[i] === pv[i]) || !(op![i] === op![i])) { missing++; continue }
    if (flags[i] & (AT_LOW | AT_HIGH)) limited++
    pvLow = Math.min(pvLow, pv[i])
    pvHigh = Math.max(pvHigh, pv[i])
    opLow = Math.min(opLow, op![i])
    opHigh = Math.max(opHigh, op![i])
  }
  const pvMove = Math.max(0, pvHigh - pvLow)
  const opMove = Math.max(0, opHigh - opLow)
  const reason = n < LEAST_SAMPLES
    ? `It has only ${n} samples; at least ${LEAST_SAMPLES} are needed.`
    : missing > 0.05 * n
      ? `${Math.round(100 * missing / n)} % of its samples are missing.`
      : outages.some(o => o.fromMs < t[end - 1] && o.toMs > t[begin])
        ? 'It lies in a declared outage.'
        : pvMove === 0
          ? 'PV does not move at all: frozen, or its resolution too coarse.'
          : opMove < OP_MOVE_FRACTION * (setup.opHigh - setup.opLow)
            ? 'OP hardly moves, so it says nothing about the process.'
            : limited > 0.9 * n ? 'OP stands at a limit all the time.' : ''
  return { usable: reason === '', reason, pvMove, opMove }
}

/** The record of one stretch of time on its grid. */
export function preparedBetween(record: LoopRecord, setup: LoopSetup, fromMs: number, toMs: number): PreparedRecord {
  return prepareRecord(record, setup, { id: '', hourEdges: Float64Array.of(fromMs, toMs) })
}
