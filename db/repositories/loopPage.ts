import type { Database } from '../knex'
import type { LoopWeekAssessment } from '../../shared/assessment/types'

export interface LoopWeekDetail { week: string, assessedAt: Date, methodVersion: string, loopVersion: number, changeMark: 'worse' | 'better' | null, changeSince: string | null, detail: LoopWeekAssessment }

export async function findLoopWeek(db: Database, loopId: number, week: string): Promise<LoopWeekDetail | null> {
  const r = await db('loop_weeks').where({ loop_id: loopId, week }).first()
  return r ? { week: r.week, assessedAt: r.assessed_at, methodVersion: r.method_version, loopVersion: r.loop_version, changeMark: r.change_mark, changeSince: r.change_since, detail: r.detail } : null
}

export interface LoopWeekPoint {
  week: string, ribbon: string, lostHours: number, verdict: string, confidence: number | null, methodVersion: string, loopVersion: number, assessedAt: Date
  iaePercentSpan: number | null, standardDeviation: number | null, varianceRatio: number | null, serviceFactor: number | null, oscillationPeriod: number | null, reversalsPerDay: number | null
}

/** All weeks of a loop, oldest first. */
export async function listWeeksOfLoop(db: Database, loopId: number): Promise<LoopWeekPoint[]> {
  const rows = await db('loop_weeks').where({ loop_id: loopId }).orderBy('week_start')
    .select('week', 'ribbon', 'lost_hours', 'verdict', 'confidence', 'method_version', 'loop_version', 'assessed_at', 'iae_percent_span', 'standard_deviation', 'variance_ratio', 'service_factor', 'oscillation_period', 'reversals_per_day')
  return rows.map(r => ({
    week: r.week, ribbon: r.ribbon, lostHours: r.lost_hours, verdict: r.verdict, confidence: r.confidence, methodVersion: r.method_version, loopVersion: r.loop_version, assessedAt: r.assessed_at,
    iaePercentSpan: r.iae_percent_span, standardDeviation: r.standard_deviation, varianceRatio: r.variance_ratio, serviceFactor: r.service_factor, oscillationPeriod: r.oscillation_period, reversalsPerDay: r.reversals_per_day,
  }))
}

/** Earlier assessments of a loop-week, newest first, with the cause of each. */
export async function listEarlierAssessments(db: Database, loopId: number) {
  const rows = await db('loop_week_history').where({ loop_id: loopId }).orderBy('id', 'desc').limit(200)
  return rows.map(r => ({ week: r.week as string, methodVersion: r.method_version as string, loopVersion: r.loop_version as number, assessedAt: r.assessed_at as Date, lostHours: r.lost_hours as number, verdict: r.verdict as string, confidence: r.confidence as number | null, cause: r.cause as string }))
}

export interface SetAside { id: number, verdict: string, week: string, reason: string, untilAt: Date, by: string | null, createdAt: Date, endedAt: Date | null }
export async function listSetAsides(db: Database, loopId: number): Promise<SetAside[]> {
  const rows = await db('set_asides as s').leftJoin('users as u', 'u.id', 's.created_by').where('s.loop_id', loopId).orderBy('s.id', 'desc').select('s.*', 'u.name as by_name')
  return rows.map(r => ({ id: r.id, verdict: r.verdict, week: r.week, reason: r.reason, untilAt: r.until_at, by: r.by_name, createdAt: r.created_at, endedAt: r.ended_at }))
}
export async function insertSetAside(trx: Database, s: { loopId: number, verdict: string, week: string, reason: string, untilAt: Date, userId: number | null }): Promise<number> {
  const [row] = await trx('set_asides').insert({ loop_id: s.loopId, verdict: s.verdict, week: s.week, reason: s.reason, until_at: s.untilAt, created_by: s.userId }).returning('id')
  return row.id
}
export async function endSetAsides(trx: Database, loopId: number): Promise<number> {
  return trx('set_asides').where({ loop_id: loopId }).whereNull('ended_at').update({ ended_at: trx.fn.now() })
}

export interface Concern { id: number, text: string, by: string | null, createdAt: Date }
export async function insertConcern(trx: Database, c: { loopId: number, text: string, userId: number | null }): Promise<number> {
  const [row] = await trx('concerns').insert({ loop_id: c.loopId, text: c.text, user_id: c.userId }).returning('id')
  return row.id
}
export async function listConcerns(db: Database, loopId: number): Promise<Concern[]> {
  const rows = await db('concerns as c').leftJoin('users as u', 'u.id', 'c.user_id').where('c.loop_id', loopId).orderBy('c.id', 'desc').limit(50).select('c.id', 'c.text', 'c.created_at', 'u.name')
  return rows.map(r => ({ id: r.id, text: r.text, by: r.name, createdAt: r.created_at }))
}

export interface Shelving { id: number, untilAt: Date, reason: string, by: string | null }
export async function findShelving(db: Database, loopId: number, now: Date): Promise<Shelving | null> {
  const r = await db('shelvings as s').leftJoin('users as u', 'u.id', 's.created_by').where('s.loop_id', loopId).whereNull('s.ended_at').where('s.until_at', '>', now).orderBy('s.id', 'desc').first('s.id', 's.until_at', 's.reason', 'u.name')
  return r ? { id: r.id, untilAt: r.until_at, reason: r.reason, by: r.name } : null
}
export async function listShelvedLoopIds(db: Database, now: Date): Promise<number[]> {
  return (await db('shelvings').whereNull('ended_at').where('until_at', '>', now).distinct('loop_id')).map(r => Number(r.loop_id))
}
export async function insertShelving(trx: Database, s: { loopId: number, untilAt: Date, reason: string, userId: number | null }): Promise<void> {
  await trx('shelvings').insert({ loop_id: s.loopId, until_at: s.untilAt, reason: s.reason, created_by: s.userId })
}
export async function endShelvings(trx: Database, loopId: number): Promise<number> {
  return trx('shelvings').where({ loop_id: loopId }).whereNull('ended_at').update({ ended_at: trx.fn.now() })
}

/** How often each verdict was set aside as not a problem, against how often it was given and how often a ticket proved it. */
export async function listVerdictPrecision(db: Database) {
  const { rows } = await db.raw(`
    select v.verdict, v.given,
      coalesce(s.n, 0)::int as set_aside,
      coalesce(t.confirmed, 0)::int as confirmed,
      coalesce(t.denied, 0)::int as denied
    from (select verdict, count(distinct loop_id)::int as given from loop_weeks group by verdict) v
    left join (select verdict, count(distinct loop_id) as n from set_asides group by verdict) s on s.verdict = v.verdict
    left join (
      select e->>'verdict' as verdict,
        count(*) filter (where outcome = case e->>'verdict' when 'huntingValve' then 'valveRepaired' when 'huntingTuning' then 'retuned' when 'sluggish' then 'retuned'
          when 'sensor' then 'sensorRepaired' when 'huntingExternal' then 'processChanged' end) as confirmed,
        count(*) filter (where outcome = 'notAProblem') as denied
      from tickets, lateral jsonb_array_elements(evidence) e where state = 'closed' group by 1) t on t.verdict = v.verdict
    order by v.verdict`)
  return rows.map((r: Record<string, any>) => ({ verdict: r.verdict as string, given: r.given as number, setAside: r.set_aside as number, confirmed: r.confirmed as number, denied: r.denied as number }))
}
