import { appendBlock } from '../../../db/blocks/appendBlock'
import { encodeBlock } from '../../../db/blocks/encodeBlock'
import { COLUMN_MISSING } from '../../../db/blocks/encodeColumn'
import { mergeBlock } from '../../../db/blocks/mergeBlock'
import { mergeSamples } from '../../../db/blocks/mergeSamples'
import { DAY_MS, MODE_UNKNOWN, type DaySamples, type TrendBlock } from '../../../db/blocks/types'
import type { LongSink } from './scan/longSink'
import { pooledFloats, pooledInts, pooledBytes } from '../../../db/blocks/pool'
import type { SignalName } from './scan/signalNames'
import type { WideSink } from './scan/wideSink'

export const SIGNALS: SignalName[] = ['pv', 'sp', 'op', 'mode']

/** Least and largest value seen, for loops whose range has to be guessed. */
export interface Seen { pvMin: number, pvMax: number, opMin: number, opMax: number }

/** A loop while its file is read; `loopId` of its blocks is its index in the collector until they are stored. */
export interface CollectedLoop { tag: string, id: number | null, seen: Seen | null, days: Map<string, TrendBlock>, latest: string }

/** Turns what the sinks hold into day blocks, joined as more comes in. Encoded days take a tenth of the memory of plain ones. */
export class BlockCollector {
  readonly loops: CollectedLoop[] = []
  bytes = 0

  constructor(private readonly modeNames: string[]) {}

  addLoop(tag: string, id: number | null, guessRange: boolean): number {
    return this.loops.push({ tag, id, days: new Map(), latest: '', seen: guessRange ? { pvMin: Infinity, pvMax: -Infinity, opMin: Infinity, opMax: -Infinity } : null }) - 1
  }

  /** Rows of a wide file. `columns[loop]` says which column of the sink each signal is; -1: none. */
  takeWide(sink: WideSink, columns: { loop: number, pv: number, sp: number, op: number, mode: number }[]): void {
    const rows = sink.rows
    const order = ascending(sink.t, rows) ? null : orderOf(sink.t, rows)
    let t = sink.t
    let n = rows
    let heads: Int32Array | null = null
    if (order) {
      // rows of the same time become one: heads[k] is where the k-th time begins in the order
      heads = pooledInts('collect.heads', rows + 1)
      t = pooledFloats('collect.t', rows)
      n = 0
      for (let i = 0; i < rows; i++) {
        if (n > 0 && sink.t[order[i]] === t[n - 1]) continue
        heads[n] = i
        t[n++] = sink.t[order[i]]
      }
      heads[n] = rows
    }
    const plain = (name: string, c: number): Float64Array | null => {
      if (c < 0) return null
      const column = sink.values.subarray(c * sink.capacity, c * sink.capacity + rows)
      if (!order) return column
      const out = pooledFloats(`collect.${name}`, n)
      for (let k = 0; k < n; k++) {
        let value = NaN
        for (let i = heads![k]; i < heads![k + 1]; i++) if (!Number.isNaN(column[order[i]])) value = column[order[i]]
        out[k] = value
      }
      return out
    }
    const modes = (c: number): Uint8Array | null => {
      if (c < 0) return null
      const column = sink.modes.subarray(c * sink.capacity, c * sink.capacity + rows)
      if (!order) return column
      const out = pooledBytes('collect.mode', n)
      for (let k = 0; k < n; k++) {
        let value = MODE_UNKNOWN
        for (let i = heads![k]; i < heads![k + 1]; i++) if (column[order[i]] !== MODE_UNKNOWN) value = column[order[i]]
        out[k] = value
      }
      return out
    }
    for (const c of columns) this.add(c.loop, { t, pv: plain('pv', c.pv), sp: plain('sp', c.sp), op: plain('op', c.op), mode: modes(c.mode), modeNames: this.modeNames }, 0, n)
  }

  /** Lines of a long file. `targets[series]` = loop * 4 + signal. */
  takeLong(sink: LongSink, targets: number[]): void {
    const slots = this.loops.length * 4
    const starts = pooledInts('collect.starts', slots + 1).subarray(0, slots + 1).fill(0)
    for (let i = 0; i < sink.rows; i++) starts[targets[sink.series[i]] + 1]++
    for (let k = 0; k < slots; k++) starts[k + 1] += starts[k]
    const fill = pooledInts('collect.fill', slots)
    fill.set(starts.subarray(0, slots))
    const t = pooledFloats('collect.longT', sink.rows)
    const v = pooledFloats('collect.longV', sink.rows)
    for (let i = 0; i < sink.rows; i++) {
      const at = fill[targets[sink.series[i]]]++
      t[at] = sink.t[i]
      v[at] = sink.value[i]
    }
    for (let loop = 0; loop < this.loops.length; loop++) {
      if (starts[loop * 4] === starts[loop * 4 + 4]) continue
      const parts: { signal: SignalName, t: Float64Array, v: Float64Array }[] = []
      for (let s = 0; s < 4; s++) {
        const a = starts[loop * 4 + s]
        const b = starts[loop * 4 + s + 1]
        if (a === b) continue
        let ts = t.subarray(a, b)
        let vs = v.subarray(a, b)
        if (!ascending(ts, b - a)) {
          const order = orderOf(ts, b - a)
          const keep = Array.from(order.subarray(0, b - a)).filter((i, k, all) => k === all.length - 1 || ts[i] !== ts[all[k + 1]])
          vs = Float64Array.from(keep, i => vs[i])
          ts = Float64Array.from(keep, i => ts[i])
        }
        parts.push({ signal: SIGNALS[s], t: ts, v: vs })
      }
      const first = parts[0]
      const together = parts.every(p => p.t.length === first.t.length && sameTimes(p.t, first.t))
      const asSamples = (some: typeof parts): DaySamples => {
        const of = (signal: SignalName) => some.find(p => p.signal === signal)?.v ?? null
        const mode = of('mode')
        return { t: some[0].t, pv: of('pv'), sp: of('sp'), op: of('op'), mode: mode && Uint8Array.from(mode), modeNames: mode ? this.modeNames : [] }
      }
      // each signal has its own times in a file of changes: they go onto one axis, missing where a signal has no sample
      const samples = together ? asSamples(parts) : parts.map(p => asSamples([p])).reduce((all, one) => mergeSamples(all, one).samples)
      this.add(loop, samples, 0, samples.t.length)
    }
  }

  private add(loop: number, samples: DaySamples, from: number, to: number): void {
    const { seen } = this.loops[loop]
    if (seen) {
      for (let i = from; samples.pv && i < to; i++) {
        const v = samples.pv[i]
        if (v < seen.pvMin) seen.pvMin = v
        if (v > seen.pvMax) seen.pvMax = v
      }
      for (let i = from; samples.op && i < to; i++) {
        const v = samples.op[i]
        if (v < seen.opMin) seen.opMin = v
        if (v > seen.opMax) seen.opMax = v
      }
    }
    while (from < to) {
      const end = (Math.floor(samples.t[from] / DAY_MS) + 1) * DAY_MS
      let k = to
      if (samples.t[to - 1] >= end) {
        let low = from
        while (low < k) {
          const middle = (low + k) >> 1
          if (samples.t[middle] < end) low = middle + 1
          else k = middle
        }
      }
      this.join(loop, encodeBlock(loop, samples, from, k))
      from = k
    }
  }

  private join(loop: number, block: TrendBlock): void {
    const empty = (bytes: Uint8Array | null) => bytes === null || bytes[0] === COLUMN_MISSING
    if (empty(block.pv) && empty(block.sp) && empty(block.op) && (block.mode === null || modesMissing(block))) return
    const { days } = this.loops[loop]
    const before = days.get(block.day)
    const now = !before ? block : appendBlock(before, block) ?? mergeBlock(before, block).block ?? before
    this.bytes += sizeOf(now) - (before ? sizeOf(before) : 0)
    days.set(block.day, now)
    if (block.day > this.loops[loop].latest) this.loops[loop].latest = block.day
  }

  /** Hands over finished blocks: all, or those of days that a file in order of time does not come back to. */
  drain(all: boolean): { loop: number, block: TrendBlock }[] {
    const out: { loop: number, block: TrendBlock }[] = []
    this.loops.forEach(({ days, latest }, loop) => {
      for (const [day, block] of days) {
        if (!all && day === latest) continue
        out.push({ loop, block })
        this.bytes -= sizeOf(block)
        days.delete(day)
      }
    })
    return out
  }
}

const sizeOf = (b: TrendBlock) => (b.pv?.length ?? 0) + (b.sp?.length ?? 0) + (b.op?.length ?? 0) + (b.mode?.length ?? 0) + (b.timestamps?.length ?? 0) + 200

function modesMissing(block: TrendBlock): boolean {
  if (block.mode![0] !== MODE_UNKNOWN) return false
  // one run only: its length takes the rest of the bytes
  let p = 1
  while (block.mode![p] >= 128) p++
  return p + 1 === block.mode!.length
}

function ascending(t: Float64Array, n: number): boolean {
  for (let i = 1; i < n; i++) if (!(t[i] > t[i - 1])) return false
  return true
}

function sameTimes(a: Float64Array, b: Float64Array): boolean {
  for (let i = 0; i < a.length; i++) if (a[i] !== b[i]) return false
  return true
}

/** Stable order by time; a newest-first file is only turned round. */
function orderOf(t: Float64Array, n: number): Int32Array {
  const order = pooledInts('collect.order', n).subarray(0, n)
  for (let i = 0; i < n; i++) order[i] = i
  return order.sort((a, b) => t[a] - t[b] || a - b)
}
