import type { Database } from '../knex'
import type { Finding, Oscillation } from '../../shared/assessment/types'

export interface HuntingLoop { loopId: number, tag: string, upstream: string[], oscillations: Oscillation[], findings: Finding[] }

/** Loops of a week in which an oscillation was detected. */
export async function listHuntingLoops(db: Database, week: string): Promise<HuntingLoop[]> {
  const rows = await db('loop_weeks as w').join('loops as l', 'l.id', 'w.loop_id').where('w.week', week).whereNotNull('w.oscillation_period').orderBy('l.tag')
    .select('l.id', 'l.tag', 'l.upstream', db.raw('w.detail->\'oscillations\' as oscillations'), db.raw('w.detail->\'findings\' as findings'))
  return rows.map(r => ({ loopId: r.id, tag: r.tag, upstream: r.upstream, oscillations: r.oscillations, findings: r.findings }))
}

export interface GroupWrite { letter: string, periodS: number, likelySource: number, evidence: string[], members: { loopId: number, strength: number, lagS: number, rank: number, score: number, reasons: string[] }[] }

/** Puts the groups of a week in place of the ones that were there. Tickets keep their number of a group that goes: it becomes null. */
export async function replaceGroups(trx: Database, week: string, groups: GroupWrite[]): Promise<void> {
  const stays = groups.map(g => g.letter)
  await trx('loop_groups').where({ week }).whereNotIn('letter', stays).delete()
  for (const g of groups) {
    const [row] = await trx('loop_groups').insert({ week, letter: g.letter, period_s: g.periodS, likely_source: g.likelySource, evidence: JSON.stringify(g.evidence) })
      .onConflict(['week', 'letter']).merge(['period_s', 'likely_source', 'evidence']).returning('id')
    await trx('loop_group_members').where({ group_id: row.id }).delete()
    await trx('loop_group_members').insert(g.members.map(m => ({ group_id: row.id, loop_id: m.loopId, strength: m.strength, lag_s: m.lagS, rank: m.rank, score: m.score, reasons: JSON.stringify(m.reasons) })))
  }
}

export interface GroupView {
  id: number, week: string, letter: string, period: number, likelySource: string | null, evidence: string[], openTicket: number | null
  members: { tag: string, description: string, area: string, strength: number, lag: number | null, rank: number, score: number, reasons: string[], ribbon: string, lostHours: number, verdict: string, upstream: string[], pvUnit: string }[]
}

export async function listGroups(db: Database, week: string): Promise<GroupView[]> {
  const { rows } = await db.raw(`
    select g.id, g.week, g.letter, g.period_s as period, s.tag as "likelySource", g.evidence,
      (select min(t.id) from tickets t where t.group_id = g.id and t.state not in ('closed', 'dropped')) as "openTicket",
      (select json_agg(json_build_object('tag', l.tag, 'description', l.description, 'area', coalesce(a.name, ''), 'strength', m.strength, 'lag', m.lag_s, 'rank', m.rank, 'score', m.score,
        'reasons', m.reasons, 'ribbon', w.ribbon, 'lostHours', w.lost_hours, 'verdict', w.verdict, 'upstream', l.upstream, 'pvUnit', l.pv_unit) order by m.rank)
       from loop_group_members m join loops l on l.id = m.loop_id left join areas a on a.id = l.area_id left join loop_weeks w on w.loop_id = l.id and w.week = g.week where m.group_id = g.id) as members
    from loop_groups g left join loops s on s.id = g.likely_source where g.week = ? order by (select count(*) from loop_group_members m where m.group_id = g.id) desc, g.letter`, [week])
  return rows
}

export async function listRibbonsUntil(db: Database, week: string): Promise<{ loopId: number, week: string, ribbon: string }[]> {
  const rows = await db('loop_weeks').where('week', '<=', week).orderBy(['loop_id', 'week_start']).select('loop_id', 'week', 'ribbon')
  return rows.map(r => ({ loopId: r.loop_id, week: r.week, ribbon: r.ribbon }))
}

export async function writeChangeMarks(trx: Database, week: string, marks: { loopId: number, mark: string, since: string }[]): Promise<void> {
  await trx('loop_weeks').where({ week }).whereNotNull('change_mark').update({ change_mark: null, change_since: null })
  if (marks.length === 0) return
  await trx.raw(`update loop_weeks w set change_mark = x.mark, change_since = x.since from unnest(?::bigint[], ?::text[], ?::text[]) as x (loop_id, mark, since) where w.week = ? and w.loop_id = x.loop_id`,
    [marks.map(m => m.loopId), marks.map(m => m.mark), marks.map(m => m.since), week])
}
