import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { insertTicketEvent, lockTicket, updateTicket } from '../../../db/repositories/tickets'
import { objectionToMove } from '../../../shared/tickets/moves'
import { objectionToOutcome } from '../../../shared/tickets/outcomes'
import type { Outcome } from '../../../shared/types/tickets'
import { Refusal } from '../refusal'
import type { Actor } from './caller'
import { proveTicket } from './proveTicket'
import { noSuchTicket } from './refusals'

/** Closes a ticket on its proof. An outcome that the proof contradicts needs a reason: 409 `proof_says_otherwise`. */
export async function closeTicket(db: Knex, actor: Actor, id: number, { outcome, reason, version }: { outcome: Outcome, reason?: string, version?: number }): Promise<void> {
  // The proof reads days of samples, so it is made before the row is locked; the version tells whether it still fits.
  const proof = await proveTicket(db, id, {})
  await db.transaction(async (trx) => {
    const ticket = await lockTicket(trx, id)
    if (!ticket) throw noSuchTicket()
    if (version !== undefined && version !== ticket.version) throw new Refusal(409, 'changed_meanwhile', `Somebody changed ticket ${id} meanwhile. Look at it again before closing.`, { version: ticket.version, state: ticket.state })
    const objection = objectionToMove(ticket.state, 'closed', { role: actor.role, isAssignee: ticket.assigneeId === actor.userId }, { assignee: true, reason: Boolean(reason) })
    if (objection) throw new Refusal(objection.code === 'not_allowed' ? 403 : 409, objection.code, objection.message)
    const contradiction = objectionToOutcome(outcome, proof)
    if (contradiction && !reason?.trim()) throw new Refusal(409, contradiction.code, contradiction.message, { proof: proof.verdict })
    const now = new Date()
    await updateTicket(trx, id, { state: 'closed', outcome, closeReason: reason?.trim() || null, proof, proofFinal: false, closedAt: now, closedBy: actor.userId })
    await insertTicketEvent(trx, { ticketId: id, userId: actor.userId, actor: actor.name, kind: 'closed', text: reason ?? null, data: { outcome, proof: proof.verdict, provisional: proof.provisional } })
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: 'ticket.close', entity: 'ticket', entityId: id, data: { outcome, proof: proof.verdict } })
  })
}
