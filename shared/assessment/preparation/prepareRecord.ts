/**
 * Lays one loop's record of one week on its native grid and marks every slot: received, in range, mode, limits.
 *
 * Rules (methods: preparation). The native interval is the median spacing. Each sample stands for one interval after
 * its stamp. A spacing of up to 5 intervals is a short gap: its empty slots stay NaN and unreceived. A longer one
 * splits the record into stretches. A PV more than 5 % of span beyond its range is missing of the kind "out of range".
 * A sample whose mode is not known is taken as in a normal mode, like a record without MODE. OP counts as at a limit
 * within 0.5 % of span for 3 samples or more at a stretch; an on-off output lives at its limits, so it never does.
 *
 * Cost O(n). Where nothing is missing the result shares the memory of the record; neither may be changed.
 * Source: our definitions, laid down with the meanings of the figures.
 */
import { MODE_UNKNOWN, type LoopRecord, type LoopSetup, type WeekFrame } from '../types'
import { firstFrom } from './firstFrom'
import { medianInterval } from './medianInterval'

export const RECEIVED = 1
export const OUT_OF_RANGE = 2
export const MODE_KNOWN = 4
export const OFF_NORMAL = 8
export const AT_LOW = 16
export const AT_HIGH = 32
export const FROZEN = 64

export const SHORT_GAP_INTERVALS = 5
const RANGE_MARGIN = 0.05
const LIMIT_MARGIN = 0.005
const LIMIT_RUN = 3

export interface PreparedRecord {
  /** native interval, s; NaN below two samples */
  intervalS: number
  /** slots */
  n: number
  /** begin of each slot, epoch ms */
  t: Float64Array
  /** NaN: missing or out of range */
  pv: Float64Array
  sp: Float64Array | null
  op: Float64Array | null
  /** SP - PV, NaN where either is missing; null without SP */
  error: Float64Array | null
  flags: Uint8Array
  /** index pairs [begin, end) without a long gap between */
  stretches: { begin: number, end: number }[]
  hasMode: boolean
  longGaps: number
  missingSlots: number
  outOfRange: number
}

/**
 * @param record samples, any span; only those inside the week are used
 * @param week hour edges of the week
 * @returns the prepared record, n = 0 where the week holds no sample
 * @throws RangeError on a PV or OP range without width, or stamps that do not ascend
 */
export function prepareRecord(record: LoopRecord, setup: LoopSetup, week: WeekFrame): PreparedRecord {
  const pvSpan = setup.pvHigh - setup.pvLow
  const opSpan = setup.opHigh - setup.opLow
  if (!(pvSpan > 0)) throw new RangeError(`prepareRecord: pvHigh must be above pvLow, got ${setup.pvLow} to ${setup.pvHigh}`)
  if (!(opSpan > 0)) throw new RangeError(`prepareRecord: opHigh must be above opLow, got ${setup.opLow} to ${setup.opHigh}`)

  const from = firstFrom(record.t, week.hourEdges[0])
  const to = firstFrom(record.t, week.hourEdges[week.hourEdges.length - 1])
  const cut = (a: Float64Array | null) => a && a.subarray(from, to)
  let t = record.t.subarray(from, to)
  let pv = record.pv.subarray(from, to)
  let sp = cut(record.sp)
  let op = cut(record.op)
  let mode = record.mode && record.mode.subarray(from, to)

  // a record of one stray sample in the week takes its interval from the samples around it
  const intervalMs = t.length > 1 ? medianInterval(t) : medianInterval(record.t)
  const stretches: { begin: number, end: number }[] = []
  let longGaps = 0
  let missingSlots = 0
  {
    // steps between neighbours in whole intervals; 1 is the plain case
    let extra = 0
    for (let i = 1; i < t.length; i++) {
      const spacing = t[i] - t[i - 1]
      if (spacing === intervalMs) continue
      const step = Math.round(spacing / intervalMs)
      if (step > SHORT_GAP_INTERVALS) longGaps++
      else if (step > 1) extra += step - 1
    }
    missingSlots = extra
    if (extra === 0) {
      let begin = 0
      if (longGaps > 0) {
        for (let i = 1; i < t.length; i++) {
          if (Math.round((t[i] - t[i - 1]) / intervalMs) > SHORT_GAP_INTERVALS) {
            stretches.push({ begin, end: i })
            begin = i
          }
        }
      }
      if (t.length > 0) stretches.push({ begin, end: t.length })
    }
    else {
      const n = t.length + extra
      const spread = (a: Float64Array | null) => (a ? new Float64Array(n).fill(NaN) : null)
      const t2 = new Float64Array(n)
      const pv2 = spread(pv)!
      const sp2 = spread(sp)
      const op2 = spread(op)
      const mode2 = mode ? new Uint8Array(n).fill(MODE_UNKNOWN) : null
      const empty = new Uint8Array(n)
      let k = 0
      let begin = 0
      for (let i = 0; i < t.length; i++) {
        if (i > 0) {
          const step = Math.round((t[i] - t[i - 1]) / intervalMs)
          if (step > SHORT_GAP_INTERVALS) {
            stretches.push({ begin, end: k })
            begin = k
          }
          else {
            for (let s = 1; s < step; s++) {
              t2[k] = t[i - 1] + s * intervalMs
              empty[k++] = 1
            }
          }
        }
        t2[k] = t[i]
        pv2[k] = pv[i]
        if (sp2) sp2[k] = sp![i]
        if (op2) op2[k] = op![i]
        if (mode2) mode2[k] = mode![i]
        k++
      }
      stretches.push({ begin, end: k })
      t = t2
      pv = pv2
      sp = sp2
      op = op2
      mode = mode2
    }
  }

  const n = t.length
  const flags = new Uint8Array(n)
  const lowest = setup.pvLow - RANGE_MARGIN * pvSpan
  const highest = setup.pvHigh + RANGE_MARGIN * pvSpan
  let outOfRange = 0
  for (let i = 0; i < n; i++) {
    const x = pv[i]
    if (x < lowest || x > highest) outOfRange++
  }
  const pvInRange = outOfRange > 0 ? pv.slice() : pv

  const named = Math.min(record.modeNames.length, MODE_UNKNOWN)
  let firstNamed = 0
  if (mode) while (firstNamed < n && mode[firstNamed] >= named) firstNamed++
  const hasMode = mode !== null && firstNamed < n
  const normal = new Uint8Array(256)
  const normalNames = new Set(setup.normalModes.map(m => m.toUpperCase()))
  record.modeNames.forEach((name, code) => { normal[code] = normalNames.has(name.toUpperCase()) ? 1 : 0 })

  const error = sp ? new Float64Array(n) : null
  for (let i = 0; i < n; i++) {
    const x = pv[i]
    let f = 0
    if (x === x) {
      f = RECEIVED
      if (x < lowest || x > highest) {
        f |= OUT_OF_RANGE
        pvInRange[i] = NaN
      }
    }
    else if ((op !== null && op[i] === op[i]) || (sp !== null && sp[i] === sp[i])) {
      // the loop answers but its PV does not: that is a bad reading, not an absent record
      f = RECEIVED
    }
    if (hasMode) {
      const m = mode![i]
      if (m < named) f |= normal[m] ? MODE_KNOWN : MODE_KNOWN | OFF_NORMAL
    }
    flags[i] = f
    if (error) error[i] = sp![i] - pvInRange[i]
  }
  if (op && setup.form !== 'onOff') {
    markLimit(op, flags, AT_LOW, setup.opLow + LIMIT_MARGIN * opSpan, -1)
    markLimit(op, flags, AT_HIGH, setup.opHigh - LIMIT_MARGIN * opSpan, 1)
  }

  return { intervalS: intervalMs / 1000, n, t, pv: pvInRange, sp, op, error, flags, stretches, hasMode, longGaps, missingSlots, outOfRange }
}

/** Marks runs of at least LIMIT_RUN samples at or beyond a limit; `side` -1 below, 1 above. */
function markLimit(op: Float64Array, flags: Uint8Array, bit: number, limit: number, side: number): void {
  let run = 0
  for (let i = 0; i <= op.length; i++) {
    // a whisker wider than the limit, so that 99.5 written in decimals is at the limit of 99.5
    const at = i < op.length && side * (op[i] - limit) >= -1e-9 * Math.abs(limit)
    if (at) run++
    else {
      if (run >= LIMIT_RUN) for (let k = i - run; k < i; k++) flags[k] |= bit
      run = 0
    }
  }
}
