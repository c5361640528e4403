import type { Knex } from 'knex'
import { findNewestWeek, hasGroup, readEvidence } from '../../../db/repositories/ticketEvidence'
import { insertTicket, insertTicketEvent, setWatching } from '../../../db/repositories/tickets'
import { insertAudit } from '../../../db/repositories/audit'
import { notifyAssignment } from './notifications'
import { requireAssignee } from './requireAssignee'
import { Refusal } from '../refusal'
import type { Actor } from './caller'

export interface OpenTicketInput { tags: string[], /** whose evidence is kept; the newest when left out */ week?: string, title?: string, priority?: 1 | 2 | 3, dueOn?: string | null, assigneeId?: number | null, groupId?: number | null, note?: string, followUpOf?: number | null }

const verdictTitles: Record<string, string> = {
  steady: 'look after', huntingTuning: 'hunts: tuned too tight', huntingValve: 'hunts: sticking valve', huntingExternal: 'hunts: carried in from elsewhere',
  sluggish: 'sluggish', saturated: 'runs against its limit', manual: 'left in manual', sensor: 'sensor doubtful', noise: 'noise-dominated', cannotTell: 'find out what is wrong',
}

/** Opens one ticket for one or many loops and keeps the evidence as it is now. Returns its number. */
export async function openTicket(db: Knex, actor: Actor, input: OpenTicketInput): Promise<number> {
  return db.transaction(trx => openTicketIn(trx, actor, input))
}

/** The same inside a transaction that has begun. */
export async function openTicketIn(trx: Knex.Transaction, actor: Actor, input: OpenTicketInput): Promise<number> {
  const week = input.week ?? await findNewestWeek(trx)
  if (!week) throw new Refusal(422, 'invalid_input', 'Nothing was assessed yet, so there is no evidence to open a ticket on.', { issues: [{ path: 'week', message: 'no week was assessed' }] })
  const tags = [...new Set(input.tags)]
  const evidence = await readEvidence(trx, tags, week)
  const unknown = tags.filter(tag => !evidence.some(e => e.tag === tag))
  if (unknown.length) throw new Refusal(422, 'invalid_input', `There is no loop named ${unknown.join(', ')}.`, { issues: [{ path: 'tags', message: `unknown: ${unknown.join(', ')}` }] })
  if (input.assigneeId) await requireAssignee(trx, input.assigneeId)
  if (input.groupId && !await hasGroup(trx, input.groupId)) throw new Refusal(422, 'invalid_input', 'This group is not there any more.', { issues: [{ path: 'groupId', message: 'unknown' }] })
  const inOrder = tags.map(tag => evidence.find(e => e.tag === tag)!)
  const first = inOrder[0]!
  const title = input.title?.trim() || `${first.tag} ${verdictTitles[first.verdict]}${inOrder.length > 1 ? ` (and ${inOrder.length - 1} more)` : ''}`
  const state = input.assigneeId ? 'assigned' as const : 'open' as const
  const id = await insertTicket(trx, {
    title, state, priority: input.priority ?? first.priority, dueOn: input.dueOn ?? null, assigneeId: input.assigneeId ?? null, openedBy: actor.userId,
    groupId: input.groupId ?? null, followUpOf: input.followUpOf ?? null, week,
    evidence: inOrder.map(({ loopId: _, priority: __, ...kept }) => kept), loopIds: inOrder.map(e => e.loopId),
  })
  await insertTicketEvent(trx, { ticketId: id, userId: actor.userId, actor: actor.name, kind: 'opened', text: input.note ?? null, data: { state: { from: null, to: state }, tags, assigneeId: input.assigneeId ?? null } })
  if (actor.userId) await setWatching(trx, id, actor.userId, true)
  await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: 'ticket.open', entity: 'ticket', entityId: id, data: { tags } })
  if (input.assigneeId) await notifyAssignment(trx, { ticketId: id, title, assigneeId: input.assigneeId, by: actor })
  return id
}
