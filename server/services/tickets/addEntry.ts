import type { Knex } from 'knex'
import { insertTicketEvent, lockTicket, setWatching, updateTicket } from '../../../db/repositories/tickets'
import { insertAudit } from '../../../db/repositories/audit'
import { insertTuningRecord } from '../../../db/repositories/tuningRecords'
import { atLeast } from '../../../shared/types/people'
import { getSettings } from '../settings'
import { Refusal } from '../refusal'
import { noSuchTicket } from './refusals'
import type { Actor } from './caller'

export type Entry =
  | { kind: 'comment', text: string }
  | { kind: 'check', checkId: string, values: Record<string, string | number | null>, tag?: string }
  | { kind: 'tuning', tag: string, stage: 'asFound' | 'asLeft', tuning: Record<string, string | number | null>, reason: string, changeNumber?: string | null }

export interface EntryInput { entry: Entry, idempotencyKey: string | null, /** when it was written on the device */ at?: Date }

/**
 * Adds a comment, the answer to a field check or a tuning record. Sent again with the same key it changes nothing and
 * answers `false`, so a device that lost its connection may repeat as often as it likes.
 */
export async function addEntry(db: Knex, actor: Actor, ticketId: number, { entry, idempotencyKey, at }: EntryInput): Promise<boolean> {
  return db.transaction(async (trx) => {
    const ticket = await lockTicket(trx, ticketId)
    if (!ticket) throw noSuchTicket()
    const mayWork = atLeast(actor.role, 'engineer') || (actor.role === 'technician' && ticket.assigneeId === actor.userId)
    if (entry.kind !== 'comment' && !mayWork) throw new Refusal(403, 'not_allowed', 'Only the person assigned, or an engineer, may do this.')
    const { kind, ...data } = entry
    const fresh = await insertTicketEvent(trx, { ticketId, userId: actor.userId, actor: actor.name, kind, text: entry.kind === 'comment' ? entry.text : entry.kind === 'tuning' ? entry.reason : null, data, idempotencyKey, at })
    if (!fresh) return false
    if (entry.kind === 'check') {
      const now = (at ?? new Date()).toISOString()
      await updateTicket(trx, ticketId, { checks: { ...ticket.checks, [entry.checkId]: { ...entry.values, at: now, by: actor.name } } })
    }
    if (entry.kind === 'tuning') {
      const loop = ticket.loops.find(l => l.tag === entry.tag)
      if (!loop) throw new Refusal(422, 'invalid_input', `${entry.tag} is not a loop of this ticket.`)
      if (entry.stage === 'asLeft' && (await getSettings(trx)).changeNumberRequired && !entry.changeNumber?.trim()) {
        throw new Refusal(422, 'invalid_input', 'This site asks for the management-of-change number with every change of tuning.', { issues: [{ path: 'changeNumber', message: 'required' }] })
      }
      await insertTuningRecord(trx, { loopId: loop.id, ticketId, userId: actor.userId, actor: actor.name, kind: entry.stage, tuning: entry.tuning, reason: entry.reason, changeNumber: entry.changeNumber ?? null, at })
    }
    if (entry.kind === 'comment' && actor.userId) await setWatching(trx, ticketId, actor.userId, true)
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: `ticket.${kind}`, entity: 'ticket', entityId: ticketId, data })
    return true
  })
}
