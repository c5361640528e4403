import { pooledFloats, pooledInts } from '../../../../db/blocks/pool'

/** Values of a long file in the order of its lines, in memory that is used again. */
export class LongSink {
  readonly capacity = 1 << 20
  readonly t = pooledFloats('long.t', this.capacity)
  readonly value = pooledFloats('long.value', this.capacity)
  readonly series = pooledInts('long.series', this.capacity)
  rows = 0

  constructor(private readonly emit: (sink: LongSink) => void) {}

  push(t: number, series: number, value: number): void {
    const row = this.rows
    this.t[row] = t
    this.series[row] = series
    this.value[row] = value
    this.rows = row + 1
    if (this.rows === this.capacity) this.flush()
  }

  flush(): void {
    if (this.rows > 0) this.emit(this)
    this.rows = 0
  }
}
