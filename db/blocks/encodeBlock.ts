import { encodeColumn } from './encodeColumn'
import { encodeModes } from './encodeModes'
import { encodeTimes, regularInterval } from './encodeTimes'
import { BLOCK_CODEC, DAY_MS, type DaySamples, type TrendBlock } from './types'

export const dayOf = (ms: number): string => new Date(Math.floor(ms / DAY_MS) * DAY_MS).toISOString().slice(0, 10)

/** Encodes samples[from..to) of one loop and one UTC day. Throws when there are none, or when they leave the day. */
export function encodeBlock(loopId: number, samples: DaySamples, from = 0, to = samples.t.length): TrendBlock {
  const { t, sp, pv, op, mode, modeNames } = samples
  const n = to - from
  if (!(n > 0)) throw new RangeError('encodeBlock: a block needs a sample')
  const day = dayOf(t[from])
  if (Math.floor(t[to - 1] / DAY_MS) !== Math.floor(t[from] / DAY_MS)) throw new RangeError(`encodeBlock: samples from ${day} to ${dayOf(t[to - 1])} are not of one day`)
  const intervalMs = regularInterval(t, from, to)
  const column = (values: Float64Array | null) => values && encodeColumn(values, from, to)
  return {
    loopId, day, n, t0: t[from], intervalMs, timestamps: intervalMs === null ? encodeTimes(t, t[from], from, to) : null,
    sp: column(sp), pv: column(pv), op: column(op), mode: mode && encodeModes(mode, from, to), modeNames: mode ? [...modeNames] : [], codec: BLOCK_CODEC,
  }
}
