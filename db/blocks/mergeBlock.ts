import { decodeBlock } from './decodeBlock'
import { encodeBlock } from './encodeBlock'
import { mergeSamples } from './mergeSamples'
import type { TrendBlock } from './types'

const sameBytes = (a: Uint8Array | null, b: Uint8Array | null): boolean =>
  a === b || (a !== null && b !== null && a.length === b.length && Buffer.compare(a, b) === 0)

/** True when two blocks hold the same bytes; the encoding is deterministic, so a file sent twice ends here. */
export function sameBlock(a: TrendBlock, b: TrendBlock): boolean {
  return a.n === b.n && a.t0 === b.t0 && a.intervalMs === b.intervalMs && a.codec === b.codec
    && a.modeNames.join('\n') === b.modeNames.join('\n')
    && sameBytes(a.pv, b.pv) && sameBytes(a.sp, b.sp) && sameBytes(a.op, b.op) && sameBytes(a.mode, b.mode) && sameBytes(a.timestamps, b.timestamps)
}

export interface BlockMerge { block: TrendBlock | null, changed: number, added: number, fromMs: number, toMs: number }

/**
 * Lays a later block over the stored one of the same loop and day, sample by sample.
 * `block` is null when the later one brings nothing new, so that nothing needs to be written or assessed again.
 */
export function mergeBlock(stored: TrendBlock, later: TrendBlock): BlockMerge {
  if (stored.loopId !== later.loopId || stored.day !== later.day) throw new RangeError('mergeBlock: the blocks are of different loops or days')
  if (sameBlock(stored, later)) return { block: null, changed: 0, added: 0, fromMs: NaN, toMs: NaN }
  const { samples, ...rest } = mergeSamples(decodeBlock(stored), decodeBlock(later))
  return { block: rest.changed + rest.added === 0 ? null : encodeBlock(stored.loopId, samples), ...rest }
}
