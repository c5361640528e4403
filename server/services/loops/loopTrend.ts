import { decodeBlock } from '../../../db/blocks/decodeBlock'
import { MODE_UNKNOWN, type DaySamples } from '../../../db/blocks/types'
import type { Database } from '../../../db/knex'
import { findLoop } from '../../../db/repositories/loops'
import { findBlockSpan, listBlocks } from '../../../db/repositories/trendBlocks'
import { Refusal } from '../refusal'
import { thinTrend, type ThinTrend } from './thinTrend'

const DAY_MS = 86_400_000

export interface TrendAnswer { t: string[], pv: (number | null)[], sp: (number | null)[], op: (number | null)[], mode: (string | null)[] }

/** Samples of a loop in [from, to), thinned to at most `points` rows with the peaks kept. Without a span: the last seven days there are. */
export async function loopTrend(db: Database, tag: string, span: { from?: Date, to?: Date, points: number }): Promise<TrendAnswer> {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  const stored = await findBlockSpan(db, loop.id)
  const to = span.to?.getTime() ?? (stored ? Date.parse(stored.last) + DAY_MS : 0)
  const from = span.from?.getTime() ?? (span.to ? to - 7 * DAY_MS : Math.max(stored ? Date.parse(stored.first) : 0, to - 7 * DAY_MS))
  if (!(to > from) && stored) throw new Refusal(422, 'invalid_input', 'The span must end after it begins.', { issues: [{ path: 'to', message: 'must be after from' }] })
  const blocks = stored ? await listBlocks(db, [loop.id], from, to) : []
  return toAnswer(thinTrend(joinDays(blocks.map(decodeBlock), from, to), span.points))
}

const toAnswer = (trend: ThinTrend): TrendAnswer => ({ ...trend, t: trend.t.map(ms => new Date(ms).toISOString()) })

/** Days in their order as one stretch, cut to [from, to). */
export function joinDays(days: DaySamples[], from: number, to: number): DaySamples {
  const cut = days.map((d) => {
    let a = 0
    let b = d.t.length
    while (a < b && d.t[a] < from) a++
    while (b > a && d.t[b - 1] >= to) b--
    const part = <T extends Float64Array | Uint8Array | null>(x: T): T => (x ? x.subarray(a, b) : null) as T
    return { ...d, t: d.t.subarray(a, b), pv: part(d.pv), sp: part(d.sp), op: part(d.op), mode: part(d.mode) }
  }).filter(d => d.t.length > 0)
  const n = cut.reduce((sum, d) => sum + d.t.length, 0)
  const values = (key: 'pv' | 'sp' | 'op') => cut.some(d => d[key]) ? new Float64Array(n).fill(NaN) : null
  const out: DaySamples = { t: new Float64Array(n), pv: values('pv'), sp: values('sp'), op: values('op'), mode: cut.some(d => d.mode) ? new Uint8Array(n).fill(MODE_UNKNOWN) : null, modeNames: [] }
  let at = 0
  for (const d of cut) {
    out.t.set(d.t, at)
    for (const key of ['pv', 'sp', 'op'] as const) if (d[key]) out[key]!.set(d[key], at)
    if (d.mode) {
      const codes = d.modeNames.map(name => out.modeNames.includes(name) ? out.modeNames.indexOf(name) : out.modeNames.push(name) - 1)
      for (let i = 0; i < d.mode.length; i++) out.mode![at + i] = d.mode[i] === MODE_UNKNOWN ? MODE_UNKNOWN : codes[d.mode[i]]
    }
    at += d.t.length
  }
  return out
}
