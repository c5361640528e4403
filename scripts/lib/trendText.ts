import type { ColumnSpool } from './columnSpool'
import { MISSING } from './columnSpool'

export interface TrendColumn {
  tag: string
  decimals: [number, number, number]
}

const SIGNALS = ['PV', 'SP', 'OP'] as const
const CHUNK = 1 << 18

/**
 * The rows of a spool as the text of a historian's export, in chunks. A missing value is an empty cell (wide) or an empty
 * value (long); times are ISO 8601 UTC.
 * @param modeNames words for the mode codes; other codes are missing
 */
export function* trendText(spool: ColumnSpool, columns: TrendColumn[], modeNames: string[], layout: 'wide' | 'long', startMs: number, intervalMs: number): Generator<Buffer> {
  const widest = 40 + Math.max(...columns.map(c => c.tag.length)) * 4
  let out = Buffer.allocUnsafeSlow(CHUNK)
  let at = 0
  const text = (s: string) => { at += out.write(s, at, 'latin1') }
  const number = (scaled: number, decimals: number) => {
    let v = scaled
    if (v < 0) { out[at++] = 45; v = -v }
    let digits = 1
    for (let p = 10; p <= v; p *= 10) digits++
    if (digits <= decimals) digits = decimals + 1
    let end = at + digits + (decimals > 0 ? 1 : 0)
    const next = end
    for (let i = 0; i < digits; i++) {
      if (i === decimals && decimals > 0) out[--end] = 46
      out[--end] = 48 + v % 10
      v = (v / 10) | 0
    }
    at = next
  }
  const room = function* () {
    if (at + widest * 8 < CHUNK) return
    yield out.subarray(0, at)
    // a chunk handed on may still be on its way to the disk: never written to again
    out = Buffer.allocUnsafeSlow(CHUNK)
    at = 0
  }

  if (layout === 'wide') {
    text('timestamp')
    for (const { tag } of columns) {
      for (const signal of [...SIGNALS, 'MODE']) text(`,${tag}.${signal}`)
      yield* room()
    }
    text('\n')
  }
  else text('timestamp,tag,value\n')

  for (const block of spool.blocks()) {
    for (let row = 0; row < block.rows; row++) {
      const time = new Date(startMs + (block.from + row) * intervalMs).toISOString().replace('.000Z', 'Z')
      if (layout === 'wide') text(time)
      for (let loop = 0; loop < columns.length; loop++) {
        const { tag, decimals } = columns[loop]
        if (at + widest * 8 >= CHUNK) yield* room()
        for (let signal = 0; signal < 3; signal++) {
          const value = block.value(loop, signal, row)
          if (layout === 'long') { text(time); out[at++] = 44; text(tag); text(`.${SIGNALS[signal]}`) }
          out[at++] = 44
          if (value !== MISSING) number(value, decimals[signal])
          if (layout === 'long') out[at++] = 10
        }
        const mode = modeNames[block.mode(loop, row)] ?? ''
        if (layout === 'long') { text(time); out[at++] = 44; text(tag); text('.MODE,'); text(mode); out[at++] = 10 }
        else { out[at++] = 44; text(mode) }
      }
      if (layout === 'wide') out[at++] = 10
    }
  }
  yield out.subarray(0, at)
}
