import { decodeColumn } from './decodeColumn'
import { decodeModes } from './decodeModes'
import { decodeTimes } from './decodeTimes'
import { pooledBytes, pooledFloats } from './pool'
import { BLOCK_CODEC, MODE_UNKNOWN, type DaySamples, type TrendBlock } from './types'

/**
 * Blocks of one loop, in order of day, as one stretch of [fromMs, toMs). The arrays are views of memory that the next
 * call in this thread uses again: take what is needed out of them before.
 */
export function decodeBlocks(blocks: Omit<TrendBlock, 'loopId' | 'day'>[], fromMs: number, toMs: number): DaySamples {
  const total = blocks.reduce((n, b) => n + b.n, 0)
  const has = (signal: 'pv' | 'sp' | 'op' | 'mode') => blocks.some(b => b[signal] !== null)
  const t = pooledFloats('decode.t', total)
  const columns = (['pv', 'sp', 'op'] as const).map(signal => ({ signal, out: has(signal) ? pooledFloats(`decode.${signal}`, total) : null }))
  const mode = has('mode') ? pooledBytes('decode.mode', total) : null
  const modeNames: string[] = []
  let at = 0
  for (const block of blocks) {
    if (block.codec !== BLOCK_CODEC) throw new Error(`decodeBlocks: codec ${block.codec} is not known to this version`)
    decodeTimes(block, t, at)
    for (const { signal, out } of columns) {
      if (!out) continue
      if (block[signal]) decodeColumn(block[signal], block.n, out, at)
      else out.fill(NaN, at, at + block.n)
    }
    if (mode && block.mode) {
      decodeModes(block.mode, block.n, mode, at)
      // each block numbers its modes by itself
      const codes = block.modeNames.map(name => modeNames.includes(name) ? modeNames.indexOf(name) : modeNames.push(name) - 1)
      if (codes.some((code, i) => code !== i)) for (let i = at; i < at + block.n; i++) if (mode[i] !== MODE_UNKNOWN) mode[i] = codes[mode[i]] ?? MODE_UNKNOWN
    }
    else { mode?.fill(MODE_UNKNOWN, at, at + block.n) }
    at += block.n
  }
  let from = 0
  let to = total
  while (from < to && t[from] < fromMs) from++
  while (to > from && t[to - 1] >= toMs) to--
  const part = (x: Float64Array | null) => x && x.subarray(from, to)
  return { t: t.subarray(from, to), pv: part(columns[0].out), sp: part(columns[1].out), op: part(columns[2].out), mode: mode && mode.subarray(from, to), modeNames }
}
