import { decodeBlocks } from '../../../db/blocks/decodeBlocks'
import { pooledFloats } from '../../../db/blocks/pool'
import type { TrendBlock } from '../../../db/blocks/types'
import { MODE_UNKNOWN, type LoopRecord } from '../../../shared/assessment/types'

/**
 * Blocks of one loop, in order of day, as one record of [fromMs, toMs). Its arrays are views of memory that the next
 * call in this thread uses again.
 * @param normalModes a mode given as a number says nothing unless the loop's set-up names that number; then it is unknown
 */
export function loopRecord(blocks: TrendBlock[], fromMs: number, toMs: number, normalModes: string[]): LoopRecord {
  const { t, pv, sp, op, mode, modeNames } = decodeBlocks(blocks, fromMs, toMs)
  const meaningless = modeNames.map(name => /^[\d.]+$/.test(name) && !normalModes.includes(name))
  if (mode && meaningless.includes(true)) for (let i = 0; i < mode.length; i++) if (meaningless[mode[i]]) mode[i] = MODE_UNKNOWN
  return alignSignals({ t, pv: pv ?? pooledFloats('record.none', t.length).subarray(0, t.length).fill(NaN), sp, op, mode, modeNames })
}

/**
 * Puts signals onto the times of PV where a historian reported them apart: by their own time stamps, or only when they
 * changed. The last value holds then. Signals that share PV's times are left as they are, gaps and all.
 */
function alignSignals(record: LoopRecord): LoopRecord {
  const { t, pv } = record
  const n = t.length
  const pvCount = countNumbers(pv)
  if (pvCount === 0) return record
  let apart = false
  const align = (x: Float64Array | Uint8Array, unknown: number, steps: boolean) => {
    const present = (v: number) => v === v && v !== unknown
    const { count, both } = x instanceof Float64Array ? countBeside(x, pv) : countKnownBeside(x, pv)
    if (count === 0 || count === n) return
    const interleaved = both < 0.5 * Math.min(count, pvCount)
    if (!interleaved && !(steps && count < 0.2 * pvCount)) return
    apart ||= interleaved
    // a set point or a mode holds until it changes; an output at most for a few of its own intervals
    const holdMs = steps ? Infinity : 5 * (t[n - 1] - t[0]) / count
    let last = -1
    for (let i = 0; i < n; i++) {
      if (present(x[i])) last = i
      else if (last >= 0 && t[i] - t[last] <= holdMs) x[i] = x[last]
    }
  }
  const { sp, op, mode } = record
  if (sp) align(sp, NaN, true)
  if (op) align(op, NaN, false)
  if (mode) align(mode, MODE_UNKNOWN, true)
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

// Apart for each kind of array: a loop that sees both kinds is several times slower.

function countNumbers(x: Float64Array): number {
  let count = 0
  for (let i = 0; i < x.length; i++) if (x[i] === x[i]) count++
  return count
}

function countBeside(x: Float64Array, pv: Float64Array): { count: number, both: number } {
  let count = 0
  let both = 0
  for (let i = 0; i < x.length; i++) {
    if (x[i] !== x[i]) continue
    count++
    if (pv[i] === pv[i]) both++
  }
  return { count, both }
}

function countKnownBeside(x: Uint8Array, pv: Float64Array): { count: number, both: number } {
  let count = 0
  let both = 0
  for (let i = 0; i < x.length; i++) {
    if (x[i] === MODE_UNKNOWN) continue
    count++
    if (pv[i] === pv[i]) both++
  }
  return { count, both }
}
