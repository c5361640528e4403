import type { Knex } from 'knex'
import { insertTicketEvent, lockTicket, setWatching, updateTicket, type TicketChange, type TicketRow } from '../../../db/repositories/tickets'
import { insertAudit } from '../../../db/repositories/audit'
import { atLeast } from '../../../shared/types/people'
import { objectionToMove } from '../../../shared/tickets/moves'
import type { TicketState } from '../../../shared/types/tickets'
import { Refusal } from '../refusal'
import { notifyAssignment, notifyHandBack, notifySentBack } from './notifications'
import { requireAssignee } from './requireAssignee'
import { noSuchTicket } from './refusals'
import { writtenAt } from './writtenAt'
import type { Actor } from './caller'

export interface ChangeTicketInput {
  /** the version that the person saw; another one means somebody was quicker */
  version: number
  state?: Exclude<TicketState, 'closed'>
  assigneeId?: number | null
  title?: string
  priority?: 1 | 2 | 3
  dueOn?: string | null
  watching?: boolean
  reason?: string
  workDoneAt?: string
  /** when it was written on a device without connection */
  at?: string
}

/**
 * Changes a ticket under its lock. 409 `changed_meanwhile` carries the ticket as it is now, so that nothing is lost:
 * the client shows both and lets the person decide.
 */
export async function changeTicket(db: Knex, actor: Actor, id: number, input: ChangeTicketInput): Promise<void> {
  await db.transaction(async (trx) => {
    const ticket = await lockTicket(trx, id)
    if (!ticket) throw noSuchTicket()
    if (input.watching !== undefined && actor.userId) await setWatching(trx, id, actor.userId, input.watching)
    const wants = wanted(ticket, input)
    if (Object.keys(wants).length === 0) return
    if (ticket.version !== input.version) throw new Refusal(409, 'changed_meanwhile', `Somebody changed ticket ${id} meanwhile. Nothing of yours was saved yet; look at both and save again.`, { theirs: asTheyAre(ticket) })
    const isAssignee = ticket.assigneeId !== null && ticket.assigneeId === actor.userId
    const assigneeId = wants.assigneeId !== undefined ? wants.assigneeId : ticket.assigneeId
    if (wants.state) {
      const objection = objectionToMove(ticket.state, wants.state, { role: actor.role, isAssignee }, { assignee: assigneeId !== null, reason: Boolean(input.reason?.trim()) })
      if (objection) throw new Refusal(objection.code === 'not_allowed' ? 403 : objection.code === 'illegal_move' ? 409 : 422, objection.code, objection.message)
    }
    // it divides before from after in the proof
    if (wants.workDoneAt && !wants.state && !isAssignee && !atLeast(actor.role, 'engineer')) throw new Refusal(403, 'not_allowed', 'When the work was done is said by the person assigned, or an engineer.')
    const beyondState = Object.keys(wants).some(key => key !== 'state' && key !== 'workDoneAt')
    if (beyondState && !atLeast(actor.role, 'engineer')) throw new Refusal(403, 'not_allowed', 'Title, priority, due date and assignee are changed by an engineer.')
    if (wants.assigneeId) await requireAssignee(trx, wants.assigneeId)
    if (wants.assigneeId === null && ['inWork', 'toVerify'].includes(wants.state ?? ticket.state)) throw new Refusal(422, 'needs_assignee', 'Somebody has to hold a ticket that is being worked on. Give it to another person, or put it back to open.')
    if (wants.workDoneAt && wants.workDoneAt > new Date()) throw new Refusal(422, 'invalid_input', 'The work cannot have been done in the future.', { issues: [{ path: 'workDoneAt', message: 'lies ahead' }] })
    const at = writtenAt(input.at ? new Date(input.at) : undefined)
    const change: TicketChange = { ...wants }
    if (wants.assigneeId && ticket.state === 'open' && !wants.state) change.state = 'assigned'
    if (wants.assigneeId === null && ticket.state === 'assigned' && !wants.state) change.state = 'open'
    if (change.state === 'open') change.assigneeId = null
    if (change.state === 'toVerify' && !change.workDoneAt) change.workDoneAt = at
    await updateTicket(trx, id, change)
    await insertTicketEvent(trx, { ticketId: id, userId: actor.userId, actor: actor.name, kind: change.state ? 'moved' : 'changed', text: input.reason ?? null, data: described(ticket, change), at })
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: change.state ? `ticket.${change.state}` : 'ticket.change', entity: 'ticket', entityId: id, data: described(ticket, change) })
    if (change.assigneeId && change.assigneeId !== ticket.assigneeId) await notifyAssignment(trx, { ticketId: id, title: change.title ?? ticket.title, assigneeId: change.assigneeId, by: actor })
    if (change.state === 'toVerify') await notifyHandBack(trx, { ticketId: id, title: ticket.title, openedBy: ticket.openedBy, by: actor })
    if (ticket.state === 'toVerify' && change.state === 'inWork') await notifySentBack(trx, { ticketId: id, title: ticket.title, assigneeId, reason: input.reason ?? '', by: actor })
  })
}

/** What a person needs to see when somebody was quicker. */
const asTheyAre = ({ version, state, title, priority, dueOn, assigneeId, assignee, updatedAt }: TicketRow) => ({ version, state, title, priority, dueOn, assigneeId, assignee, updatedAt })

/** What really differs from the ticket as it is. */
function wanted(ticket: TicketRow, input: ChangeTicketInput): TicketChange {
  const wants: TicketChange = {}
  if (input.state && input.state !== ticket.state) wants.state = input.state
  if (input.assigneeId !== undefined && input.assigneeId !== ticket.assigneeId) wants.assigneeId = input.assigneeId
  if (input.title !== undefined && input.title.trim() && input.title !== ticket.title) wants.title = input.title.trim()
  if (input.priority !== undefined && input.priority !== ticket.priority) wants.priority = input.priority
  if (input.dueOn !== undefined && input.dueOn !== ticket.dueOn) wants.dueOn = input.dueOn
  if (input.workDoneAt !== undefined) wants.workDoneAt = new Date(input.workDoneAt)
  return wants
}

function described(ticket: TicketRow, change: TicketChange): Record<string, unknown> {
  return Object.fromEntries(Object.entries(change).map(([key, value]) => [key, { from: ticket[key as keyof TicketRow] ?? null, to: value }]))
}
