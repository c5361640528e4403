import { decodeTimes } from './decodeTimes'
import { encodeColumn } from './encodeColumn'
import { encodeTimes, regularInterval } from './encodeTimes'
import { encodeModes } from './encodeModes'
import { MODE_UNKNOWN, type TrendBlock } from './types'

const join = (a: Uint8Array, b: Uint8Array): Uint8Array => {
  const out = new Uint8Array(a.length + b.length)
  out.set(a)
  out.set(b, a.length)
  return out
}

/**
 * Joins two blocks of one loop and day of which the second begins after the first ends, without decoding the columns:
 * a long day can be encoded piece by piece. Null when they overlap or their mode names do not continue: merge then.
 */
export function appendBlock(a: TrendBlock, b: TrendBlock): TrendBlock | null {
  const endOfA = a.intervalMs === null ? decodeTimes(a)[a.n - 1] : a.t0 + (a.n - 1) * a.intervalMs
  if (b.t0 <= endOfA || !a.modeNames.every((name, i) => b.modeNames[i] === name || b.modeNames.length === 0)) return null
  const missing = (n: number) => encodeColumn(new Float64Array(n).fill(NaN))
  const column = (x: Uint8Array | null, y: Uint8Array | null) => !x && !y ? null : join(x ?? missing(a.n), y ?? missing(b.n))
  const unknown = (n: number) => encodeModes(new Uint8Array(n).fill(MODE_UNKNOWN))
  const n = a.n + b.n
  const step = b.t0 - endOfA
  const steps = [a, b].filter(x => x.n > 1).map(x => x.intervalMs)
  let intervalMs: number | null = steps.every(s => s === step) ? step : null
  let timestamps: Uint8Array | null = null
  if (intervalMs === null) {
    const t = new Float64Array(n)
    decodeTimes(a, t)
    decodeTimes(b, t, a.n)
    intervalMs = regularInterval(t)
    timestamps = encodeTimes(t, a.t0)
  }
  return {
    ...a, n, intervalMs, timestamps,
    sp: column(a.sp, b.sp), pv: column(a.pv, b.pv), op: column(a.op, b.op),
    mode: !a.mode && !b.mode ? null : join(a.mode ?? unknown(a.n), b.mode ?? unknown(b.n)),
    modeNames: b.modeNames.length ? b.modeNames : a.modeNames,
  }
}
