/** Marks the byte layout of a block's columns; raise it when the layout changes, and keep reading the old one. */
export const BLOCK_CODEC = 1
export const MODE_UNKNOWN = 255
export const DAY_MS = 86_400_000

/** One loop, one UTC day, as plain samples. Times ascend strictly; NaN: missing; null: the signal is not in the block. */
export interface DaySamples {
  /** epoch ms, whole numbers */
  t: Float64Array
  pv: Float64Array | null
  sp: Float64Array | null
  op: Float64Array | null
  /** index into `modeNames` or MODE_UNKNOWN */
  mode: Uint8Array | null
  modeNames: string[]
}

/** The same, encoded as it lies in `trend_blocks`. */
export interface TrendBlock {
  loopId: number
  /** UTC day, `2026-11-23` */
  day: string
  n: number
  /** epoch ms */
  t0: number
  /** ms; null: time stamps are irregular and stand in `timestamps` */
  intervalMs: number | null
  timestamps: Uint8Array | null
  sp: Uint8Array | null
  pv: Uint8Array | null
  op: Uint8Array | null
  mode: Uint8Array | null
  modeNames: string[]
  codec: number
}
