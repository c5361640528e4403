import { decodeBlocks } from '../../../db/blocks/decodeBlocks'
import type { Database } from '../../../db/knex'
import { findLoop } from '../../../db/repositories/loops'
import { findBlockSpan, listBlocksOfTag } from '../../../db/repositories/trendBlocks'
import { Refusal } from '../refusal'
import { thinTrend, type ThinTrend } from './thinTrend'

const DAY_MS = 86_400_000
/** Every sample of the span is decoded in the web process. */
const MOST_DAYS = 100

export interface TrendAnswer { t: string[], pv: (number | null)[], sp: (number | null)[], op: (number | null)[], mode: (string | null)[] }

/** Samples of a loop in [from, to), thinned to at most `points` rows with the peaks kept. Without a span: the last seven days there are. */
export async function loopTrend(db: Database, tag: string, span: { from?: Date, to?: Date, points: number }): Promise<TrendAnswer> {
  let from = span.from?.getTime()
  let to = span.to?.getTime()
  if (from === undefined || to === undefined) {
    const stored = await findBlockSpan(db, await idOf(db, tag))
    if (!stored) return { t: [], pv: [], sp: [], op: [], mode: [] }
    to ??= Math.max(Date.parse(stored.last) + DAY_MS, (from ?? 0) + DAY_MS)
    from ??= span.to ? to - 7 * DAY_MS : Math.max(Date.parse(stored.first), to - 7 * DAY_MS)
  }
  if (!(to > from)) throw new Refusal(422, 'invalid_input', 'The span must end after it begins.', { issues: [{ path: 'to', message: 'must be after from' }] })
  if (to - from > MOST_DAYS * DAY_MS) throw new Refusal(422, 'invalid_input', `At most ${MOST_DAYS} days can be drawn together.`, { issues: [{ path: 'from', message: `at most ${MOST_DAYS} days before the end` }] })
  const blocks = await listBlocksOfTag(db, tag, from, to)
  if (blocks.length === 0) await idOf(db, tag)
  return toAnswer(thinTrend(decodeBlocks(blocks, from, to), span.points))
}

async function idOf(db: Database, tag: string): Promise<number> {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  return loop.id
}

const toAnswer = (trend: ThinTrend): TrendAnswer => ({ ...trend, t: trend.t.map(ms => new Date(ms).toISOString()) })
