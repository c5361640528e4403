import { encodeColumn } from './encodeColumn'
import { encodeModes } from './encodeModes'
import { encodeTimes, regularInterval } from './encodeTimes'
import { BLOCK_CODEC, DAY_MS, type DaySamples, type TrendBlock } from './types'

export const dayOf = (ms: number): string => new Date(Math.floor(ms / DAY_MS) * DAY_MS).toISOString().slice(0, 10)

/** Encodes the samples of one loop and one UTC day. Throws when there are none, or when they leave the day. */
export function encodeBlock(loopId: number, samples: DaySamples): TrendBlock {
  const { t, sp, pv, op, mode, modeNames } = samples
  const n = t.length
  if (n === 0) throw new RangeError('encodeBlock: a block needs a sample')
  const day = dayOf(t[0])
  if (dayOf(t[n - 1]) !== day) throw new RangeError(`encodeBlock: samples from ${day} to ${dayOf(t[n - 1])} are not of one day`)
  const intervalMs = regularInterval(t)
  const column = (values: Float64Array | null) => values && encodeColumn(values)
  return {
    loopId, day, n, t0: t[0], intervalMs, timestamps: intervalMs === null ? encodeTimes(t, t[0]) : null,
    sp: column(sp), pv: column(pv), op: column(op), mode: mode && encodeModes(mode), modeNames: mode ? modeNames : [], codec: BLOCK_CODEC,
  }
}
