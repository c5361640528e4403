import type { Database } from '../knex'
import { mergeBlock } from '../blocks/mergeBlock'
import type { TrendBlock } from '../blocks/types'

const DAY_MS = 86_400_000
const columns = `loop_id, to_char(day, 'YYYY-MM-DD') as day, n, extract(epoch from t0) * 1000 as t0, interval_ms, timestamps, sp, pv, op, mode, mode_names, codec`

const toBlock = (r: Record<string, any>): TrendBlock => ({
  loopId: r.loop_id, day: r.day, n: r.n, t0: Math.round(Number(r.t0)), intervalMs: r.interval_ms, timestamps: r.timestamps, sp: r.sp, pv: r.pv, op: r.op, mode: r.mode, modeNames: r.mode_names, codec: r.codec,
})

export const blockKey = (b: { loopId: number, day: string }) => `${b.loopId} ${b.day}`

/** What laying a block over the stored ones did. `fromMs` and `toMs` enclose what is different or new; NaN when nothing is. */
export interface BlockOutcome { loopId: number, changed: number, fromMs: number, toMs: number }

/**
 * Stores blocks, sample by sample over what is there. Blocks that bring nothing new are not written.
 * Safe to run again with the same blocks. Call it in a transaction: it locks the blocks that it changes.
 */
export async function storeBlocks(trx: Database, blocks: TrendBlock[]): Promise<BlockOutcome[]> {
  const outcomes: BlockOutcome[] = []
  for (let at = 0; at < blocks.length; at += 200) {
    const part = blocks.slice(at, at + 200)
    const { rows } = await trx.raw(`select ${columns} from trend_blocks where (loop_id, day) in (select * from unnest(?::bigint[], ?::date[])) order by loop_id, trend_blocks.day for update`, [part.map(b => b.loopId), part.map(b => b.day)])
    const stored = new Map<string, TrendBlock>(rows.map(toBlock).map((b: TrendBlock) => [blockKey(b), b]))
    const write: TrendBlock[] = []
    for (const block of part) {
      const old = stored.get(blockKey(block))
      const merged = old ? mergeBlock(old, block) : { block, changed: 0, fromMs: block.t0, toMs: lastTime(block) }
      if (merged.block) write.push(merged.block)
      outcomes.push({ loopId: block.loopId, changed: merged.changed, fromMs: merged.fromMs, toMs: merged.toMs })
    }
    if (write.length > 0) await upsert(trx, write)
  }
  return outcomes
}

// irregular blocks: the end of the day is close enough for finding the weeks that a block touches
const lastTime = (b: TrendBlock): number => b.intervalMs !== null ? b.t0 + (b.n - 1) * b.intervalMs : Date.parse(b.day) + DAY_MS - 1

async function upsert(trx: Database, blocks: TrendBlock[]): Promise<void> {
  const bytes = (b: Uint8Array | null) => b && (Buffer.isBuffer(b) ? b : Buffer.from(b.buffer, b.byteOffset, b.length))
  await trx('trend_blocks').insert(blocks.map(b => ({
    loop_id: b.loopId, day: b.day, n: b.n, t0: new Date(b.t0), interval_ms: b.intervalMs, timestamps: bytes(b.timestamps),
    sp: bytes(b.sp), pv: bytes(b.pv), op: bytes(b.op), mode: bytes(b.mode), mode_names: b.modeNames, codec: b.codec,
  }))).onConflict(['loop_id', 'day']).merge()
}

/** Blocks of loops that may hold samples of [fromMs, toMs), by loop and day. */
export async function listBlocks(db: Database, loopIds: number[], fromMs: number, toMs: number): Promise<TrendBlock[]> {
  const day = (ms: number) => new Date(ms).toISOString().slice(0, 10)
  const { rows } = await db.raw(`select ${columns} from trend_blocks where loop_id = any(?::bigint[]) and trend_blocks.day between ?::date and ?::date order by loop_id, trend_blocks.day`, [loopIds, day(fromMs), day(toMs - 1)])
  return rows.map(toBlock)
}

/** The same of one loop by its tag, in one round trip: drawing is all about waiting. */
export async function listBlocksOfTag(db: Database, tag: string, fromMs: number, toMs: number): Promise<TrendBlock[]> {
  const day = (ms: number) => new Date(ms).toISOString().slice(0, 10)
  const { rows } = await db.raw(`select ${columns} from trend_blocks where loop_id = (select id from loops where tag = ?) and trend_blocks.day between ?::date and ?::date order by trend_blocks.day`, [tag, day(fromMs), day(toMs - 1)])
  return rows.map(toBlock)
}

/** First and last day (UTC) with samples of a loop. */
export async function findBlockSpan(db: Database, loopId: number): Promise<{ first: string, last: string } | null> {
  const { rows } = await db.raw(`select to_char(min(day), 'YYYY-MM-DD') as first, to_char(max(day), 'YYYY-MM-DD') as last from trend_blocks where loop_id = ?`, [loopId])
  return rows[0].first ? rows[0] : null
}

/** Takes away samples older than a day. */
export async function deleteBlocksBefore(db: Database, day: string): Promise<number> {
  return await db('trend_blocks').where('day', '<', day).delete()
}
