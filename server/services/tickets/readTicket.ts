import type { Database } from '../../../db/knex'
import { findTicket, listTicketEvents, listTicketFiles, listWatchers } from '../../../db/repositories/tickets'
import { fieldChecks, FIELD_CAUTIONS } from '../../../shared/tickets/fieldChecks'
import { legalMoves } from '../../../shared/tickets/moves'
import { noSuchTicket } from './refusals'
import type { Actor } from './caller'

/** A ticket with its history, files, watchers, the moves that this person may make and the checks that fit its verdict. */
export async function readTicket(db: Database, actor: Actor, id: number) {
  const ticket = await findTicket(db, id)
  if (!ticket) throw noSuchTicket()
  const [events, files, watchers] = await Promise.all([listTicketEvents(db, id), listTicketFiles(db, id), listWatchers(db, id)])
  const isAssignee = ticket.assigneeId !== null && ticket.assigneeId === actor.userId
  return {
    ...ticket, events, files, watchers,
    watching: watchers.some(w => w.id === actor.userId),
    moves: legalMoves(ticket.state, { role: actor.role, isAssignee }),
    fieldChecks: fieldChecks(ticket.evidence[0]?.verdict ?? 'cannotTell'),
    cautions: FIELD_CAUTIONS,
  }
}
