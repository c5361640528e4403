import type { Database } from '../knex'
import type { DigestLoop, DigestModel } from '../../shared/digest/model'
import { LOST_STATES } from '../../shared/assessment/types'

/** Loop-weeks of the areas followed (all when `areaIds` is empty), with the week before; set-aside and shelved loops left out. */
export async function listDigestLoops(db: Database, week: string, weekBefore: string, areaIds: number[]): Promise<(DigestLoop & { hours: Record<string, number>, lostBefore: number | null, verdictBefore: string | null })[]> {
  const query = db('loop_weeks as w').join('loops as l', 'l.id', 'w.loop_id').leftJoin('areas as a', 'a.id', 'l.area_id')
    .leftJoin('loop_weeks as p', function () { this.on('p.loop_id', 'l.id').andOnVal('p.week', weekBefore) })
    .where('w.week', week)
    .whereNotExists(db('set_asides as s').whereRaw('s.loop_id = l.id').whereNull('s.ended_at').whereRaw('s.until_at > now()'))
    .whereNotExists(db('shelvings as s').whereRaw('s.loop_id = l.id').whereNull('s.ended_at').whereRaw('s.until_at > now()'))
    .select('l.tag', 'l.description', 'l.form', 'a.name as area', 'w.ribbon', 'w.lost_hours', 'w.verdict', 'w.confidence', 'w.hours', 'p.lost_hours as lost_before', 'p.verdict as verdict_before')
    .orderBy([{ column: 'w.weighted_lost_hours', order: 'desc' }, { column: 'l.tag' }])
  if (areaIds.length) query.whereIn('l.area_id', areaIds)
  const rows = await query
  return rows.map(r => ({
    tag: r.tag, description: r.description, form: r.form, area: r.area ?? '', ribbon: r.ribbon, lostHours: r.lost_hours, verdict: r.verdict, confidence: r.confidence, hours: r.hours,
    lostBefore: r.lost_before, verdictBefore: r.verdict_before, change: r.lost_before === null ? null : r.lost_hours - r.lost_before,
  }))
}

export async function listDigestGroups(db: Database, week: string, areaIds: number[]): Promise<DigestModel['groups']> {
  const query = db('loop_groups as g').leftJoin('loops as l', 'l.id', 'g.likely_source').where('g.week', week).orderBy('g.letter')
    .select('g.letter', 'g.period_s', 'l.tag', db.raw('(select count(*)::int from loop_group_members m where m.group_id = g.id) as members'))
  if (areaIds.length) query.whereExists(db('loop_group_members as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.group_id = g.id').whereIn('y.area_id', areaIds))
  const rows = await query
  return rows.map(r => ({ letter: r.letter, periodS: r.period_s, members: r.members, source: r.tag ?? null }))
}

export async function listDigestTickets(db: Database, areaIds: number[], today: string, until: string): Promise<DigestModel['tickets']> {
  const query = db('tickets as t').leftJoin('users as u', 'u.id', 't.assignee_id').whereNotIn('t.state', ['closed', 'dropped']).where('t.due_on', '<=', until)
    .orderBy('t.due_on').orderBy('t.id').select('t.id', 't.title', 't.state', db.raw('to_char(t.due_on, \'YYYY-MM-DD\') as due_on'), 'u.name as assignee')
  if (areaIds.length) query.whereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.ticket_id = t.id').whereIn('y.area_id', areaIds))
  return (await query).map(r => ({ id: r.id, title: r.title, state: r.state, dueOn: r.due_on, assignee: r.assignee ?? null, overdue: r.due_on < today }))
}

/** Tickets closed in [from, to) on a proof that the loop is better, or whose proof became final then. */
export async function listDigestWins(db: Database, areaIds: number[], from: Date, to: Date): Promise<DigestModel['wins']> {
  const query = db('tickets as t').where('t.state', 'closed').where(b => b.whereBetween('t.closed_at', [from, new Date(to.getTime() - 1)]).orWhereBetween('t.proof_final_at', [from, new Date(to.getTime() - 1)])).whereRaw('t.proof->>\'verdict\' = \'better\'').orderBy('t.id')
    .select('t.id', 't.title', 't.outcome', 't.proof', 't.proof_final')
  if (areaIds.length) query.whereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.ticket_id = t.id').whereIn('y.area_id', areaIds))
  return (await query).map(r => ({
    ticketId: r.id, title: r.title, outcome: r.outcome, provisional: !r.proof_final,
    hoursPerWeek: (r.proof.loops as { verdict: string, lostHoursWonPerWeek: { value: number } | null }[]).filter(p => p.verdict === 'better').reduce((sum, p) => sum + (p.lostHoursWonPerWeek?.value ?? 0), 0),
  }))
}

/** Follow-ups opened in [from, to) because a closed ticket's loop slid back. */
export async function listDigestSlideBacks(db: Database, areaIds: number[], from: Date, to: Date): Promise<DigestModel['slidBack']> {
  const query = db('tickets as t').whereNotNull('t.follow_up_of').where('t.created_at', '>=', from).where('t.created_at', '<', to).orderBy('t.id').select('t.id', 't.follow_up_of', 't.title')
  if (areaIds.length) query.whereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.ticket_id = t.id').whereIn('y.area_id', areaIds))
  return (await query).map(r => ({ ticketId: r.follow_up_of, followUpId: r.id, title: r.title }))
}

/** Whether loop-weeks of this week still wait to be assessed, and how many are. */
export async function readDigestReadiness(db: Database, week: string): Promise<{ waiting: boolean, assessed: boolean }> {
  const [due, weeksDue, assessed] = await Promise.all([db('assessments_due').where({ week }).first('loop_id'), db('weeks_due').where({ week }).first('week'), db('loop_weeks').where({ week }).first('loop_id')])
  return { waiting: Boolean(due || weeksDue), assessed: Boolean(assessed) }
}

/** Holds off other senders of the digest until the transaction ends; false: another one is at it. */
export async function lockDigest(trx: Database, week: string): Promise<boolean> {
  const { rows } = await trx.raw('select pg_try_advisory_xact_lock(hashtext(?)) as mine', [`digest ${week}`])
  return rows[0].mine
}

export interface Subscriber { userId: number, email: string, name: string, areaIds: number[], unsubscribeToken: string }

export async function listSubscribers(db: Database): Promise<Subscriber[]> {
  const rows = await db('digest_subscriptions as s').join('users as u', 'u.id', 's.user_id').where('s.active', true).whereNull('u.disabled_at').orderBy('u.id')
    .select('u.id', 'u.email', 'u.name', 's.area_ids', 's.unsubscribe_token')
  return rows.map(r => ({ userId: r.id, email: r.email, name: r.name, areaIds: r.area_ids.map(Number), unsubscribeToken: r.unsubscribe_token }))
}

export async function findSubscription(db: Database, userId: number): Promise<{ active: boolean, areaIds: number[] } | null> {
  const row = await db('digest_subscriptions').where({ user_id: userId }).first()
  return row ? { active: row.active, areaIds: row.area_ids.map(Number) } : null
}

export async function saveSubscription(db: Database, s: { userId: number, active: boolean, areaIds: number[], token: string }): Promise<void> {
  await db('digest_subscriptions').insert({ user_id: s.userId, active: s.active, area_ids: s.areaIds, unsubscribe_token: s.token })
    .onConflict('user_id').merge({ active: s.active, area_ids: s.areaIds, updated_at: db.fn.now() })
}

/** Ends the subscription of a token and answers whose it was; null when no such token exists. Saying it twice changes nothing. */
export async function endSubscription(db: Database, token: string): Promise<number | null> {
  return (await db('digest_subscriptions').where({ unsubscribe_token: token }).update({ active: false, updated_at: db.fn.now() }).returning('user_id'))[0]?.user_id ?? null
}

export async function findDigest(db: Database, week: string): Promise<{ week: string, dueAt: Date, madeAt: Date | null, recipients: number } | null> {
  const r = await db('digests').where({ week }).first()
  return r ? { week: r.week, dueAt: r.due_at, madeAt: r.made_at, recipients: r.recipients } : null
}

/** Writes down that the digest of a week was made; the mails carry their own unique keys. */
export async function saveDigest(trx: Database, d: { week: string, dueAt: Date, madeAt: Date, madeBy: number | null, recipients: number }): Promise<void> {
  await trx('digests').insert({ week: d.week, due_at: d.dueAt, made_at: d.madeAt, made_by: d.madeBy, recipients: d.recipients })
    .onConflict('week').merge({ made_at: d.madeAt, made_by: d.madeBy, recipients: d.recipients })
}

export async function listDigestMails(db: Database, limit = 200) {
  const rows = await db('mails').where({ kind: 'digest' }).orderBy('id', 'desc').limit(limit).select('id', 'key', 'recipient', 'subject', 'status', 'attempts', 'error', 'created_at', 'sent_at')
  return rows.map(r => ({ id: r.id as number, week: String(r.key).split('/')[1] ?? '', recipient: r.recipient as string, subject: r.subject as string, status: r.status as string, attempts: r.attempts as number, error: r.error as string | null, createdAt: r.created_at as Date, sentAt: r.sent_at as Date | null }))
}

export async function listAreaNames(db: Database, ids: number[]): Promise<string[]> {
  return (await db('areas').whereIn('id', ids).orderBy(['position', 'name']).select('name')).map(r => r.name)
}

export const lostHoursByState = (rows: { hours: Record<string, number> }[]) =>
  LOST_STATES.map(state => ({ state, hours: rows.reduce((sum, r) => sum + (r.hours[state] ?? 0), 0) }))
