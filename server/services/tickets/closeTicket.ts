import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findTicket, insertTicketEvent, lockTicket, updateTicket, type TicketRow } from '../../../db/repositories/tickets'
import { objectionToMove } from '../../../shared/tickets/moves'
import { objectionToOutcome } from '../../../shared/tickets/outcomes'
import type { Outcome } from '../../../shared/types/tickets'
import { Refusal } from '../refusal'
import type { Actor } from './caller'
import { proveTicket, type ProofQuery } from './proveTicket'
import { noSuchTicket } from './refusals'

export interface CloseInput { outcome: Outcome, reason?: string, version?: number, /** windows chosen by hand, as in the proof that the person saw */ windows?: ProofQuery }

/** Closes a ticket on its proof. An outcome that the proof contradicts needs a reason: 409 `proof_says_otherwise`. */
export async function closeTicket(db: Knex, actor: Actor, id: number, { outcome, reason, version, windows = {} }: CloseInput): Promise<void> {
  const seen = await findTicket(db, id)
  if (!seen) throw noSuchTicket()
  requireClosable(actor, seen, version)
  // The proof reads days of samples, so it is made before the row is locked; the version tells whether it still fits.
  const proof = await proveTicket(db, id, windows)
  const contradiction = objectionToOutcome(outcome, proof)
  if (contradiction && !reason?.trim()) throw new Refusal(409, contradiction.code, contradiction.message, { proof: proof.verdict, proofReason: proof.reason })
  await db.transaction(async (trx) => {
    const ticket = await lockTicket(trx, id)
    if (!ticket) throw noSuchTicket()
    requireClosable(actor, ticket, seen.version)
    const now = new Date()
    const final = !proof.provisional
    await updateTicket(trx, id, { state: 'closed', outcome, closeReason: reason?.trim() || null, proof, proofFinal: final, proofFinalAt: final ? now : null, closedAt: now, closedBy: actor.userId })
    const data = { state: { from: ticket.state, to: 'closed' }, outcome, proof: proof.verdict, provisional: proof.provisional, chosenByHand: proof.chosenByHand, against: contradiction?.code ?? null }
    await insertTicketEvent(trx, { ticketId: id, userId: actor.userId, actor: actor.name, kind: 'closed', text: reason?.trim() || null, data })
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: 'ticket.close', entity: 'ticket', entityId: id, data })
  })
}

function requireClosable(actor: Actor, ticket: TicketRow, version: number | undefined): void {
  if (version !== undefined && version !== ticket.version) throw new Refusal(409, 'changed_meanwhile', `Somebody changed ticket ${ticket.id} meanwhile. Look at it again before closing.`, { theirs: { version: ticket.version, state: ticket.state } })
  const objection = objectionToMove(ticket.state, 'closed', { role: actor.role, isAssignee: ticket.assigneeId === actor.userId }, { assignee: true, reason: true })
  if (objection) throw new Refusal(objection.code === 'not_allowed' ? 403 : 409, objection.code, objection.message)
}
