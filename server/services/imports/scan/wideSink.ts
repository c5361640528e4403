import { DAY_MS } from '../../../../db/blocks/types'
import { pooledBytes, pooledFloats } from '../../../../db/blocks/pool'

/** Rows of a wide file, column by column, in memory that is used again for each stretch of time. */
export class WideSink {
  readonly t: Float64Array
  readonly values: Float64Array
  readonly modes: Uint8Array
  rows = 0
  private day = NaN

  /**
   * @param budget bytes for the values
   * @param emit gets rows [0, rows) of the columns; column c stands at c * capacity
   */
  constructor(readonly valueColumns: number, readonly modeColumns: number, budget: number, private readonly emit: (sink: WideSink) => void) {
    const perRow = 8 * (valueColumns + 1) + modeColumns
    this.capacity = Math.max(256, Math.min(131_072, Math.floor(budget / perRow)))
    this.t = pooledFloats('wide.t', this.capacity)
    this.values = pooledFloats('wide.values', this.capacity * valueColumns)
    this.modes = pooledBytes('wide.modes', this.capacity * modeColumns)
  }

  readonly capacity: number

  /** Keeps the row that was just written at index `rows`. A new UTC day ends the stretch, so that blocks are whole days. */
  commit(t: number): void {
    const day = Math.floor(t / DAY_MS)
    let row = this.rows
    if (day !== this.day) {
      if (row >= 2048) {
        this.flush()
        for (let c = 0; c < this.valueColumns; c++) this.values[c * this.capacity] = this.values[c * this.capacity + row]
        for (let c = 0; c < this.modeColumns; c++) this.modes[c * this.capacity] = this.modes[c * this.capacity + row]
        row = 0
      }
      this.day = day
    }
    this.t[row] = t
    this.rows = row + 1
    if (this.rows === this.capacity) this.flush()
  }

  flush(): void {
    if (this.rows > 0) this.emit(this)
    this.rows = 0
  }
}
