import { decodeColumn } from '../../../db/blocks/decodeColumn'
import { decodeModes } from '../../../db/blocks/decodeModes'
import { decodeTimes } from '../../../db/blocks/decodeTimes'
import { BLOCK_CODEC, type TrendBlock } from '../../../db/blocks/types'
import { MODE_UNKNOWN, type LoopRecord } from '../../../shared/assessment/types'
import { pooledBytes, pooledFloats } from '../imports/scan/pool'

/**
 * Blocks of one loop, in order of day, as one record of [fromMs, toMs). Its arrays are views of memory that the next
 * call in this thread uses again.
 * @param normalModes a mode given as a number says nothing unless the loop's set-up names that number; then it is unknown
 */
export function loopRecord(blocks: TrendBlock[], fromMs: number, toMs: number, normalModes: string[]): LoopRecord {
  const total = blocks.reduce((n, b) => n + b.n, 0)
  const t = pooledFloats('record.t', total)
  const has = (signal: 'pv' | 'sp' | 'op' | 'mode') => blocks.some(b => b[signal] !== null)
  const columns = { pv: pooledFloats('record.pv', total), sp: has('sp') ? pooledFloats('record.sp', total) : null, op: has('op') ? pooledFloats('record.op', total) : null }
  const mode = has('mode') ? pooledBytes('record.mode', total) : null
  const modeNames: string[] = []
  let at = 0
  for (const block of blocks) {
    if (block.codec !== BLOCK_CODEC) throw new Error(`loopRecord: codec ${block.codec} is not known to this version`)
    decodeTimes(block, t, at)
    for (const signal of ['pv', 'sp', 'op'] as const) {
      const out = columns[signal]
      if (!out) continue
      if (block[signal]) decodeColumn(block[signal], block.n, out, at)
      else out.fill(NaN, at, at + block.n)
    }
    if (mode) {
      if (block.mode) {
        decodeModes(block.mode, block.n, mode, at)
        const codes = block.modeNames.map(name => meaningful(name, normalModes) ? codeOf(name, modeNames) : MODE_UNKNOWN)
        if (codes.some((code, i) => code !== i)) for (let i = at; i < at + block.n; i++) if (mode[i] !== MODE_UNKNOWN) mode[i] = codes[mode[i]] ?? MODE_UNKNOWN
      }
      else { mode.fill(MODE_UNKNOWN, at, at + block.n) }
    }
    at += block.n
  }
  let from = 0
  let to = total
  while (from < to && t[from] < fromMs) from++
  while (to > from && t[to - 1] >= toMs) to--
  const record: LoopRecord = {
    t: t.subarray(from, to), pv: columns.pv.subarray(from, to), sp: columns.sp?.subarray(from, to) ?? null, op: columns.op?.subarray(from, to) ?? null,
    mode: mode?.subarray(from, to) ?? null, modeNames,
  }
  return alignSignals(record)
}

const meaningful = (name: string, normalModes: string[]) => !/^[\d.]+$/.test(name) || normalModes.includes(name)
const codeOf = (name: string, names: string[]): number => {
  const known = names.indexOf(name)
  return known >= 0 ? known : names.push(name) - 1
}

/**
 * Puts signals onto the times of PV where a historian reported them apart: by their own time stamps, or only when they
 * changed. The last value holds then. Signals that share PV's times are left as they are, gaps and all.
 */
function alignSignals(record: LoopRecord): LoopRecord {
  const { t, pv } = record
  const n = t.length
  let pvCount = 0
  for (let i = 0; i < n; i++) if (pv[i] === pv[i]) pvCount++
  if (pvCount === 0) return record
  let apart = false
  const align = (missing: (i: number) => boolean, copy: (i: number, from: number) => void, steps: boolean) => {
    let count = 0
    let both = 0
    for (let i = 0; i < n; i++) {
      if (missing(i)) continue
      count++
      if (pv[i] === pv[i]) both++
    }
    if (count === 0) return
    const interleaved = both < 0.5 * Math.min(count, pvCount)
    if (!interleaved && !(steps && count < 0.2 * pvCount)) return
    apart ||= interleaved
    // a set point or a mode holds until it changes; an output at most for a few of its own intervals
    const holdMs = steps ? Infinity : 5 * (t[n - 1] - t[0]) / count
    let last = -1
    for (let i = 0; i < n; i++) {
      if (!missing(i)) last = i
      else if (last >= 0 && t[i] - t[last] <= holdMs) copy(i, last)
    }
  }
  const { sp, op, mode } = record
  if (sp) align(i => sp[i] !== sp[i], (i, from) => { sp[i] = sp[from] }, true)
  if (op) align(i => op[i] !== op[i], (i, from) => { op[i] = op[from] }, false)
  if (mode) align(i => mode[i] === MODE_UNKNOWN, (i, from) => { mode[i] = mode[from] }, true)
  if (!apart) return record
  let k = 0
  for (let i = 0; i < n; i++) {
    if (pv[i] !== pv[i]) continue
    t[k] = t[i]
    pv[k] = pv[i]
    if (sp) sp[k] = sp[i]
    if (op) op[k] = op[i]
    if (mode) mode[k] = mode[i]
    k++
  }
  return { ...record, t: t.subarray(0, k), pv: pv.subarray(0, k), sp: sp?.subarray(0, k) ?? null, op: op?.subarray(0, k) ?? null, mode: mode?.subarray(0, k) ?? null }
}
