import type { Database } from '../knex'
import type { KeptEvidence } from '../../shared/types/tickets'

/** What is known of these loops in that week, to be kept with a ticket; loops without an assessment come with empty evidence. */
export async function readEvidence(db: Database, tags: string[], week: string): Promise<(KeptEvidence & { loopId: number, priority: 1 | 2 | 3 })[]> {
  const rows = await db('loops as l').leftJoin('loop_weeks as w', function () { this.on('w.loop_id', 'l.id').andOnVal('w.week', week) }).whereIn('l.tag', tags)
    .select('l.id', 'l.tag', 'l.priority', 'w.verdict', 'w.confidence', 'w.lost_hours', 'w.ribbon', db.raw('w.detail->>\'verdictReason\' as reason'), db.raw('w.detail->\'evidence\' as evidence'))
  return rows.map(r => ({
    loopId: r.id, priority: r.priority, tag: r.tag, week, verdict: r.verdict ?? 'cannotTell', confidence: r.confidence, lostHours: r.lost_hours ?? 0, ribbon: r.ribbon ?? '',
    reason: r.reason ?? 'This loop was not assessed in that week.', evidence: r.evidence ?? [],
  }))
}

/** Ribbons of a loop by week, oldest first, with the begin of each week. */
export async function listRibbons(db: Database, loopId: number): Promise<{ week: string, weekStart: Date, ribbon: string }[]> {
  const rows = await db('loop_weeks').where({ loop_id: loopId }).orderBy('week_start').select('week', 'week_start', 'ribbon')
  return rows.map(r => ({ week: r.week, weekStart: r.week_start, ribbon: r.ribbon }))
}

/** Mark of what is on record for loops: changes when one of their weeks is assessed again. */
export async function readDataMark(db: Database, loopIds: number[]): Promise<string> {
  const row = await db('loop_weeks').whereIn('loop_id', loopIds).first(db.raw('count(*)::int as weeks'), db.raw('max(assessed_at) as last'))
  return `${row?.weeks ?? 0} ${row?.last ? new Date(row.last).getTime() : 0}`
}

export async function findNewestWeek(db: Database): Promise<string | null> {
  return (await db('loop_weeks').max('week as week').first())?.week ?? null
}

export async function hasGroup(db: Database, id: number): Promise<boolean> {
  return Boolean(await db('loop_groups').where({ id }).first('id'))
}
