import { decodeColumn } from './decodeColumn'
import { decodeModes } from './decodeModes'
import { decodeTimes } from './decodeTimes'
import { BLOCK_CODEC, type DaySamples, type TrendBlock } from './types'

/** The samples of a block, in arrays of their own. */
export function decodeBlock(block: Omit<TrendBlock, 'loopId' | 'day'>): DaySamples {
  if (block.codec !== BLOCK_CODEC) throw new Error(`decodeBlock: codec ${block.codec} is not known to this version`)
  const column = (bytes: Uint8Array | null) => bytes && decodeColumn(bytes, block.n)
  return {
    t: decodeTimes(block), sp: column(block.sp), pv: column(block.pv), op: column(block.op),
    mode: block.mode && decodeModes(block.mode, block.n), modeNames: block.modeNames,
  }
}
