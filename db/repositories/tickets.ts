import type { Knex } from 'knex'
import type { Database } from '../knex'
import type { KeptEvidence, TicketFacts, TicketState } from '../../shared/types/tickets'

export interface TicketRow extends TicketFacts {
  groupId: number | null
  proofFinalAt: Date | null
  workDoneAt: Date | null
  closedAt: Date | null
  closedBy: number | null
  createdAt: Date
  updatedAt: Date
  loops: { id: number, tag: string, description: string, area: string | null }[]
}

function toTicket(r: Record<string, any>): TicketRow {
  return {
    id: r.id, title: r.title, state: r.state, priority: r.priority, dueOn: r.due_on, assigneeId: r.assignee_id, assignee: r.assignee ?? null,
    openedBy: r.opened_by, opener: r.opener ?? null, groupId: r.group_id, followUpOf: r.follow_up_of, week: r.week, evidence: r.evidence,
    checks: r.checks, outcome: r.outcome, closeReason: r.close_reason, proof: r.proof, proofFinal: r.proof_final, proofFinalAt: r.proof_final_at, workDoneAt: r.work_done_at,
    closedAt: r.closed_at, closedBy: r.closed_by, version: r.version, createdAt: r.created_at, updatedAt: r.updated_at, loops: r.loops ?? [],
  }
}

const loopsOfTicket = `(select coalesce(json_agg(json_build_object('id', l.id, 'tag', l.tag, 'description', l.description, 'area', a.name) order by tl.position), '[]')
  from ticket_loops tl join loops l on l.id = tl.loop_id left join areas a on a.id = l.area_id where tl.ticket_id = t.id) as loops`

function select(db: Database): Knex.QueryBuilder {
  return db('tickets as t').leftJoin('users as w', 'w.id', 't.assignee_id').leftJoin('users as o', 'o.id', 't.opened_by')
    .select('t.*', db.raw('to_char(t.due_on, \'YYYY-MM-DD\') as due_on'), 'w.name as assignee', 'o.name as opener', db.raw(loopsOfTicket))
}

export async function findTicket(db: Database, id: number): Promise<TicketRow | null> {
  const row = await select(db).where('t.id', id).first()
  return row ? toTicket(row) : null
}

/** The same, holding the row until the transaction ends. */
export async function lockTicket(trx: Database, id: number): Promise<TicketRow | null> {
  const held = await trx('tickets').where({ id }).forUpdate().first('id')
  return held ? findTicket(trx, id) : null
}

export interface TicketFilter { states?: TicketState[], assigneeId?: number, loopTag?: string, area?: string, due?: 'overdue' | 'week', /** today in the site's zone, YYYY-MM-DD */ today?: string, search?: string, limit?: number, offset?: number }

function narrowed(query: Knex.QueryBuilder, db: Database, f: TicketFilter): Knex.QueryBuilder {
  if (f.states?.length) query.whereIn('t.state', f.states)
  if (f.assigneeId) query.where('t.assignee_id', f.assigneeId)
  if (f.loopTag) query.whereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.ticket_id = t.id').where('y.tag', f.loopTag))
  if (f.area) query.whereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').join('areas as z', 'z.id', 'y.area_id').whereRaw('x.ticket_id = t.id').where('z.name', f.area))
  if (f.due === 'overdue') query.whereRaw('t.due_on < coalesce(?::date, current_date)', [f.today ?? null]).whereNotIn('t.state', ['closed', 'dropped'])
  if (f.due === 'week') query.whereRaw('t.due_on <= coalesce(?::date, current_date) + 7', [f.today ?? null]).whereNotIn('t.state', ['closed', 'dropped'])
  if (f.search) query.where(b => b.whereILike('t.title', `%${f.search}%`).orWhereRaw('t.id::text = ?', [f.search!.replace(/^t-/i, '')]).orWhereExists(db('ticket_loops as x').join('loops as y', 'y.id', 'x.loop_id').whereRaw('x.ticket_id = t.id').whereILike('y.tag', `%${f.search}%`)))
  return query
}

export async function listTickets(db: Database, f: TicketFilter): Promise<{ total: number, rows: TicketRow[] }> {
  const [{ count }] = await narrowed(db('tickets as t'), db, f).count({ count: '*' }) as unknown as { count: number }[]
  const rows = await narrowed(select(db), db, f).orderByRaw('t.state in (\'closed\', \'dropped\'), t.priority, t.due_on nulls last, t.id desc').limit(f.limit ?? 200).offset(f.offset ?? 0)
  return { total: Number(count), rows: rows.map(toTicket) }
}

export interface NewTicket { title: string, priority: 1 | 2 | 3, dueOn: string | null, assigneeId: number | null, openedBy: number | null, groupId: number | null, followUpOf: number | null, week: string, evidence: KeptEvidence[], loopIds: number[], state: TicketState }

export async function insertTicket(trx: Database, t: NewTicket): Promise<number> {
  const [row] = await trx('tickets').insert({
    title: t.title, state: t.state, priority: t.priority, due_on: t.dueOn, assignee_id: t.assigneeId, opened_by: t.openedBy, group_id: t.groupId,
    follow_up_of: t.followUpOf, week: t.week, evidence: JSON.stringify(t.evidence),
  }).returning('id')
  await trx('ticket_loops').insert(t.loopIds.map((loop_id, position) => ({ ticket_id: row.id, loop_id, position })))
  return row.id
}

export type TicketChange = Partial<Pick<TicketRow, 'title' | 'state' | 'priority' | 'dueOn' | 'assigneeId' | 'checks' | 'outcome' | 'closeReason' | 'proof' | 'proofFinal' | 'proofFinalAt' | 'workDoneAt' | 'closedAt' | 'closedBy'>>

const columns: Record<keyof TicketChange, string> = {
  title: 'title', state: 'state', priority: 'priority', dueOn: 'due_on', assigneeId: 'assignee_id', checks: 'checks', outcome: 'outcome', closeReason: 'close_reason',
  proof: 'proof', proofFinal: 'proof_final', proofFinalAt: 'proof_final_at', workDoneAt: 'work_done_at', closedAt: 'closed_at', closedBy: 'closed_by',
}

/**
 * Writes a change; call it with the row locked. Counts the version up, except for answers to checks alone: they carry
 * their own lock, and a technician's answer must not refuse an engineer's change of the due date.
 */
export async function updateTicket(trx: Database, id: number, change: TicketChange): Promise<void> {
  const values: Record<string, unknown> = {}
  for (const [key, value] of Object.entries(change)) {
    values[columns[key as keyof TicketChange]] = value !== null && (key === 'checks' || key === 'proof') ? JSON.stringify(value) : value
  }
  await trx('tickets').where({ id }).update({ ...values, ...(Object.keys(change).some(key => key !== 'checks') ? { version: trx.raw('version + 1') } : {}), updated_at: trx.fn.now() })
}

export interface TicketEvent { id: number, at: Date, userId: number | null, actor: string, kind: string, text: string | null, data: Record<string, unknown> }

/** false when an entry with this idempotency key is there already: sent again from a device, it changes nothing. */
export async function insertTicketEvent(trx: Database, e: { ticketId: number, userId: number | null, actor: string, kind: string, text?: string | null, data?: Record<string, unknown>, idempotencyKey?: string | null, at?: Date }): Promise<boolean> {
  const rows = await trx('ticket_events').insert({
    ticket_id: e.ticketId, user_id: e.userId, actor: e.actor, kind: e.kind, text: e.text ?? null, data: JSON.stringify(e.data ?? {}), idempotency_key: e.idempotencyKey ?? null, ...(e.at ? { at: e.at } : {}),
  }).onConflict(trx.raw('(ticket_id, idempotency_key) where idempotency_key is not null') as never).ignore().returning('id')
  return rows.length > 0
}

export async function listTicketEvents(db: Database, ticketId: number): Promise<TicketEvent[]> {
  const rows = await db('ticket_events').where({ ticket_id: ticketId }).orderBy([{ column: 'at' }, { column: 'id' }])
  return rows.map(r => ({ id: r.id, at: r.at, userId: r.user_id, actor: r.actor, kind: r.kind, text: r.text, data: r.data }))
}

export async function countTicketEvents(db: Database, ticketId: number): Promise<number> {
  const row = await db('ticket_events').where({ ticket_id: ticketId }).count({ count: '*' }).first()
  return Number(row?.count ?? 0)
}

export async function setWatching(trx: Database, ticketId: number, userId: number, watching: boolean): Promise<void> {
  if (watching) await trx('ticket_watchers').insert({ ticket_id: ticketId, user_id: userId }).onConflict().ignore()
  else await trx('ticket_watchers').where({ ticket_id: ticketId, user_id: userId }).delete()
}

export async function listWatchers(db: Database, ticketId: number): Promise<{ id: number, name: string, email: string }[]> {
  return db('ticket_watchers as w').join('users as u', 'u.id', 'w.user_id').where('w.ticket_id', ticketId).orderBy('u.name').select('u.id', 'u.name', 'u.email')
}

export interface TicketFile { id: number, ticketId: number, key: string, name: string, mediaType: string, bytes: number, createdAt: Date }
const toFile = (r: Record<string, any>): TicketFile => ({ id: r.id, ticketId: r.ticket_id, key: r.file_key, name: r.name, mediaType: r.media_type, bytes: r.bytes, createdAt: r.created_at })

/** null when a file with this idempotency key is there already, or the ticket holds as many files as it may. */
export async function insertTicketFile(trx: Database, f: { ticketId: number, key: string, name: string, mediaType: string, bytes: number, userId: number | null, idempotencyKey: string | null, most: number }): Promise<number | null> {
  await trx('tickets').where({ id: f.ticketId }).forUpdate().first('id')
  const held = await trx('ticket_files').where({ ticket_id: f.ticketId }).count({ count: '*' }).first()
  if (Number(held?.count ?? 0) >= f.most) return null
  const rows = await trx('ticket_files').insert({ ticket_id: f.ticketId, file_key: f.key, name: f.name, media_type: f.mediaType, bytes: f.bytes, user_id: f.userId, idempotency_key: f.idempotencyKey })
    .onConflict(trx.raw('(ticket_id, idempotency_key) where idempotency_key is not null') as never).ignore().returning('id')
  return rows[0]?.id ?? null
}
export async function listTicketFiles(db: Database, ticketId: number): Promise<TicketFile[]> {
  return (await db('ticket_files').where({ ticket_id: ticketId }).orderBy('id')).map(toFile)
}
export async function findTicketFileByKey(db: Database, ticketId: number, idempotencyKey: string): Promise<TicketFile | null> {
  const row = await db('ticket_files').where({ ticket_id: ticketId, idempotency_key: idempotencyKey }).first()
  return row ? toFile(row) : null
}
export async function findTicketFile(db: Database, ticketId: number, id: number): Promise<TicketFile | null> {
  const row = await db('ticket_files').where({ ticket_id: ticketId, id }).first()
  return row ? toFile(row) : null
}

/** Closed tickets whose loops are still watched: proof not final, or closed less than eight weeks ago. */
export async function listWatchedClosedTickets(db: Database, since: Date): Promise<TicketRow[]> {
  return (await select(db).where('t.state', 'closed').where('t.closed_at', '>=', since).orderBy('t.id')).map(toTicket)
}

export async function listFollowUps(db: Database, ticketId: number): Promise<number[]> {
  return (await db('tickets').where({ follow_up_of: ticketId }).orderBy('id').select('id')).map(r => Number(r.id))
}

export interface BenefitRow { area: string, month: string, hours: number, provisionalHours: number, slidBackHours: number, tickets: number[] }

export async function hasFollowUp(db: Database, ticketId: number): Promise<boolean> {
  return Boolean(await db('tickets').where({ follow_up_of: ticketId }).first('id'))
}

/**
 * Hours a week won back by proven tickets, by area and month of closing. The provisional ones stand apart, and so do
 * those that slid back: a win that a follow-up had to take up again is no longer one.
 */
export async function listBenefit(db: Database, zone: string): Promise<BenefitRow[]> {
  const { rows } = await db.raw(`
    select coalesce(a.name, '') as area, to_char(t.closed_at at time zone ?, 'YYYY-MM') as month,
      sum(w.hours) filter (where t.proof_final and not w.slid) as hours,
      sum(w.hours) filter (where not t.proof_final and not w.slid) as provisional_hours,
      sum(w.hours) filter (where w.slid) as slid_back_hours,
      array_agg(distinct t.id order by t.id) as tickets
    from tickets t cross join lateral jsonb_array_elements(t.proof->'loops') p
      cross join lateral (select (p->'lostHoursWonPerWeek'->>'value')::float8 as hours, exists (select 1 from tickets f where f.follow_up_of = t.id) as slid) w
      join loops l on l.tag = p->>'tag' left join areas a on a.id = l.area_id
    where t.state = 'closed' and t.proof->>'verdict' = 'better' and p->>'verdict' = 'better' and w.hours is not null
    group by 1, 2 order by 2 desc, 1`, [zone])
  return rows.map((r: Record<string, any>) => ({ area: r.area, month: r.month, hours: Number(r.hours ?? 0), provisionalHours: Number(r.provisional_hours ?? 0), slidBackHours: Number(r.slid_back_hours ?? 0), tickets: r.tickets.map(Number) }))
}

/** Tickets not closed or dropped whose due date is past. */
export async function listOverdueTickets(db: Database, today: string): Promise<{ id: number, title: string, dueOn: string, assigneeId: number | null, openedBy: number | null }[]> {
  const rows = await db('tickets').whereNotIn('state', ['closed', 'dropped']).where('due_on', '<', today).orderBy('id').select('id', 'title', db.raw('to_char(due_on, \'YYYY-MM-DD\') as due_on'), 'assignee_id', 'opened_by')
  return rows.map(r => ({ id: r.id, title: r.title, dueOn: r.due_on, assigneeId: r.assignee_id, openedBy: r.opened_by }))
}

export async function hasTicketEntry(db: Database, ticketId: number, idempotencyKey: string): Promise<boolean> {
  return Boolean(await db('ticket_events').where({ ticket_id: ticketId, idempotency_key: idempotencyKey }).first('id'))
}

/** Everybody who closed a ticket or worked on it. */
export async function listPeopleOfTicket(db: Database, ticketId: number): Promise<number[]> {
  const rows = await db('ticket_events').where({ ticket_id: ticketId }).whereIn('kind', ['closed', 'moved', 'check', 'tuning']).whereNotNull('user_id').distinct('user_id')
  return rows.map(r => Number(r.user_id))
}
