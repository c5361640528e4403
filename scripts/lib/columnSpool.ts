import { closeSync, openSync, readSync, rmSync, writeSync } from 'node:fs'
import type { LoopRecord } from '../../shared/assessment/types'

export const MISSING = -2147483648
const BYTES = 13

/**
 * Turns loops that come one after another into rows that hold all loops, with flat memory: each loop's samples go, scaled to
 * integers, to their place in a scratch file; afterwards a block of rows of all loops is read back at a time.
 */
export class ColumnSpool {
  readonly rowsPerBlock: number
  private readonly handle: number
  private readonly scratch: Buffer

  constructor(private readonly path: string, readonly loops: number, readonly rows: number) {
    this.rowsPerBlock = Math.max(64, Math.min(4096, Math.floor(8e6 / (BYTES * loops))))
    this.handle = openSync(path, 'w+')
    this.scratch = Buffer.allocUnsafeSlow(this.rowsPerBlock * BYTES)
  }

  /** @param decimals of pv, sp, op */
  put(loop: number, record: LoopRecord, decimals: { pv: number, sp: number, op: number }): void {
    const { rowsPerBlock: size, scratch } = this
    const ints = new Int32Array(scratch.buffer, scratch.byteOffset, 3 * size)
    const scale = (values: Float64Array | null, i: number, digits: number) => {
      const x = values === null ? NaN : values[i]
      return x === x ? Math.round(x * 10 ** digits) : MISSING
    }
    for (let block = 0; block * size < this.rows; block++) {
      const from = block * size
      const n = Math.min(size, this.rows - from)
      for (let i = 0; i < n; i++) {
        ints[i] = scale(record.pv, from + i, decimals.pv)
        ints[size + i] = scale(record.sp, from + i, decimals.sp)
        ints[2 * size + i] = scale(record.op, from + i, decimals.op)
        scratch[12 * size + i] = record.mode === null ? 255 : record.mode[from + i]
      }
      writeSync(this.handle, scratch, 0, scratch.length, (block * this.loops + loop) * scratch.length)
    }
  }

  /** Blocks of rows in order. `value(loop, signal, row)`: scaled integer or MISSING; signals 0 pv, 1 sp, 2 op. */
  * blocks(): Generator<{ from: number, rows: number, value: (loop: number, signal: number, row: number) => number, mode: (loop: number, row: number) => number }> {
    const size = this.rowsPerBlock
    const bytes = Buffer.allocUnsafeSlow(size * BYTES * this.loops)
    // a loop's part is 13 * size bytes: only whole words when size is a multiple of 4, so read by DataView's rules through Buffer
    for (let from = 0; from < this.rows; from += size) {
      readSync(this.handle, bytes, 0, bytes.length, from / size * bytes.length)
      yield {
        from, rows: Math.min(size, this.rows - from),
        value: (loop, signal, row) => bytes.readInt32LE(loop * size * BYTES + 4 * (signal * size + row)),
        mode: (loop, row) => bytes[loop * size * BYTES + 12 * size + row],
      }
    }
  }

  close(): void {
    closeSync(this.handle)
    rmSync(this.path, { force: true })
  }
}
