import type { Database } from '../knex'

/** A loop-week as the assessment leaves it: `columns` in snake case, `detail` as JSON text. */
export interface LoopWeekWrite { loopId: number, week: string, cause: string, columns: Record<string, unknown>, detail: string }

export interface DueRow { loopId: number, week: string, cause: string, importIds: number[] }

/** Marks loop-weeks for assessment. One that waits already takes the import on; one in work is done again afterwards. */
export async function insertDue(trx: Database, due: { loopId: number, week: string }[], cause: string, importId: number | null): Promise<void> {
  const sorted = [...due].sort((a, b) => a.loopId - b.loopId || (a.week < b.week ? -1 : 1))
  for (let at = 0; at < sorted.length; at += 5000) {
    const part = sorted.slice(at, at + 5000)
    await trx.raw(`
      insert into assessments_due (loop_id, week, cause, import_ids)
      select l, w, ?, ?::bigint[] from unnest(?::bigint[], ?::text[]) as x (l, w)
      on conflict (loop_id, week) do update set import_ids = assessments_due.import_ids || excluded.import_ids, cause = excluded.cause`,
    [cause, importId === null ? [] : [importId], part.map(d => d.loopId), part.map(d => d.week)])
  }
  await insertWeeksDue(trx, [...new Set(due.map(d => d.week))])
}

/** Marks weeks to be looked at as a whole once none of their loops waits any more. */
export async function insertWeeksDue(db: Database, weeks: string[]): Promise<void> {
  if (weeks.length) await db.raw('insert into weeks_due (week) select unnest(?::text[]) on conflict do nothing', [[...weeks].sort()])
}

/** Locks up to `limit` waiting loop-weeks of one week for this transaction. Rows that another worker holds are left to it. */
export async function lockDue(trx: Database, limit: number): Promise<DueRow[]> {
  const { rows } = await trx.raw(`
    select loop_id, week, cause, import_ids from assessments_due
    where week = (select week from assessments_due order by requested_at, week limit 1 for update skip locked)
    order by loop_id limit ? for update skip locked`, [limit])
  return rows.map((r: Record<string, any>) => ({ loopId: r.loop_id, week: r.week, cause: r.cause, importIds: r.import_ids }))
}

export async function deleteDue(trx: Database, due: { loopId: number, week: string }[]): Promise<void> {
  await trx.raw('delete from assessments_due using unnest(?::bigint[], ?::text[]) as x (l, w) where loop_id = l and week = w', [due.map(d => d.loopId), due.map(d => d.week)])
}

/** Locks one week whose loops are all assessed, or answers null. */
export async function lockFinishedWeek(trx: Database): Promise<string | null> {
  const { rows } = await trx.raw(`
    select week from weeks_due w where not exists (select from assessments_due d where d.week = w.week)
    order by week limit 1 for update skip locked`)
  return rows[0]?.week ?? null
}

export async function deleteWeekDue(trx: Database, week: string): Promise<void> {
  await trx('weeks_due').where({ week }).delete()
}

/** Writes loop-weeks; what stood there before goes to the history with the cause of the change. */
export async function writeLoopWeeks(trx: Database, writes: LoopWeekWrite[]): Promise<void> {
  if (writes.length === 0) return
  await trx.raw(`
    insert into loop_week_history (loop_id, week, method_version, loop_version, assessed_at, lost_hours, verdict, confidence, cause)
    select w.loop_id, w.week, w.method_version, w.loop_version, w.assessed_at, w.lost_hours, w.verdict, w.confidence, x.cause
    from loop_weeks w join unnest(?::bigint[], ?::text[], ?::text[]) as x (l, week, cause) on w.loop_id = x.l and w.week = x.week`,
  [writes.map(w => w.loopId), writes.map(w => w.week), writes.map(w => w.cause)])
  await trx('loop_weeks').insert(writes.map(w => ({ loop_id: w.loopId, week: w.week, ...w.columns, detail: w.detail, assessed_at: trx.fn.now() }))).onConflict(['loop_id', 'week']).merge()
}

/** Loop-weeks on record of some loops, of some weeks, or of both. */
export async function listLoopWeekKeys(db: Database, { loopIds, weeks, areaId }: { loopIds?: number[], weeks?: string[], areaId?: number | null }): Promise<{ loopId: number, week: string }[]> {
  const query = db('loop_weeks as w').select('w.loop_id', 'w.week')
  if (loopIds) query.whereIn('w.loop_id', loopIds)
  if (weeks) query.whereIn('w.week', weeks)
  if (areaId) query.join('loops as l', 'l.id', 'w.loop_id').where('l.area_id', areaId)
  return (await query).map(r => ({ loopId: r.loop_id, week: r.week }))
}

/** Declared outages that overlap a span, with their area; null: the whole site. */
export async function listOutagesOf(db: Database, fromMs: number, toMs: number): Promise<{ areaId: number | null, fromMs: number, toMs: number }[]> {
  const rows = await db('outages').where('from_at', '<', new Date(toMs)).where('to_at', '>', new Date(fromMs)).select('area_id', 'from_at', 'to_at')
  return rows.map(r => ({ areaId: r.area_id, fromMs: r.from_at.getTime(), toMs: r.to_at.getTime() }))
}

/** Wakes the workers when the transaction commits. */
export async function notifyWork(db: Database): Promise<void> {
  await db.raw(`select pg_notify('fettle_work', '')`)
}
