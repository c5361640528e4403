import type { Knex } from 'knex'
import { hasTicketEntry, insertTicketEvent, lockTicket, setWatching, updateTicket, type TicketRow } from '../../../db/repositories/tickets'
import { insertAudit } from '../../../db/repositories/audit'
import { insertTuningRecord } from '../../../db/repositories/tuningRecords'
import { deadBand } from '../../../shared/tickets/deadBand'
import { fieldChecks } from '../../../shared/tickets/fieldChecks'
import { atLeast } from '../../../shared/types/people'
import { getSettings } from '../settings'
import { Refusal } from '../refusal'
import { noSuchTicket } from './refusals'
import { writtenAt } from './writtenAt'
import type { Actor } from './caller'

type Values = Record<string, string | number | null>
export type Entry =
  | { kind: 'comment', text: string }
  | { kind: 'check', checkId: string, tag?: string, values: Values, /** `at` of the answer that the device saw, null when it saw none; left out: not looked at */ replaces?: string | null }
  | { kind: 'tuning', tag: string, stage: 'asFound' | 'asLeft', tuning: Values, reason: string, changeNumber?: string | null }

export interface EntryInput { entry: Entry, idempotencyKey: string | null, /** when it was written on the device */ at?: Date }

/**
 * Adds a comment, the answer to a field check or a tuning record. Sent again with the same key it changes nothing and
 * answers `false`, so a device that lost its connection may repeat as often as it likes. What cannot be taken any more
 * (ticket closed, given to somebody else, answered by somebody else meanwhile) is refused by name, so that the device
 * can show it and keep it.
 */
export async function addEntry(db: Knex, actor: Actor, ticketId: number, { entry, idempotencyKey, at }: EntryInput): Promise<boolean> {
  return db.transaction(async (trx) => {
    const ticket = await lockTicket(trx, ticketId)
    if (!ticket) throw noSuchTicket()
    // before anything that may have changed since the first sending
    if (idempotencyKey && await hasTicketEntry(trx, ticketId, idempotencyKey)) return false
    const when = writtenAt(at)
    if (entry.kind !== 'comment') requireWork(actor, ticket)
    if (entry.kind === 'check') await saveCheck(trx, actor, ticket, entry, when)
    if (entry.kind === 'tuning') await saveTuning(trx, actor, ticket, entry, when)
    const { kind, ...data } = entry
    await insertTicketEvent(trx, { ticketId, userId: actor.userId, actor: actor.name, kind, text: entry.kind === 'comment' ? entry.text : entry.kind === 'tuning' ? entry.reason : null, data, idempotencyKey, at: when })
    if (entry.kind === 'comment' && actor.userId) await setWatching(trx, ticketId, actor.userId, true)
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: `ticket.${kind}`, entity: 'ticket', entityId: ticketId, data })
    return true
  })
}

function requireWork(actor: Actor, ticket: TicketRow): void {
  const mayWork = atLeast(actor.role, 'engineer') || (actor.role === 'technician' && ticket.assigneeId === actor.userId)
  if (!mayWork) throw new Refusal(403, 'not_allowed', 'Only the person assigned, or an engineer, may do this.', { assignee: ticket.assignee })
  if (ticket.state === 'closed' || ticket.state === 'dropped') throw new Refusal(409, 'ticket_closed', `Ticket ${ticket.id} is ${ticket.state}; only comments can be added.`, { state: ticket.state })
}

async function saveCheck(trx: Knex.Transaction, actor: Actor, ticket: TicketRow, entry: Extract<Entry, { kind: 'check' }>, when: Date): Promise<void> {
  const tag = entry.tag ?? ticket.loops[0]?.tag
  const kept = ticket.evidence.find(e => e.tag === tag)
  const check = kept && fieldChecks(kept.verdict).find(c => c.id === entry.checkId)
  if (!tag || !check) throw new Refusal(422, 'invalid_input', 'This check does not belong to the ticket.', { issues: [{ path: 'entry.checkId', message: 'unknown' }] })
  const there = ticket.checks[tag]?.[check.id]
  if (there && entry.replaces !== undefined && there.at !== entry.replaces) throw new Refusal(409, 'changed_meanwhile', `${there.by} answered “${check.title}” meanwhile.`, { theirs: there })
  const known = new Set(check.fields.map(f => f.key))
  const values: Values = Object.fromEntries(Object.entries(entry.values).filter(([key]) => known.has(key)))
  if (check.id === 'valveSteps') Object.assign(values, computedDeadBand(values))
  entry.values = values
  await updateTicket(trx, ticket.id, { checks: { ...ticket.checks, [tag]: { ...ticket.checks[tag], [check.id]: { values, at: when.toISOString(), by: actor.name } } } })
}

/** From the four figures of the small-step test; figures that cannot come from one are refused with the reason. */
function computedDeadBand(v: Values): Values {
  const [step, firstAnswerUp, highest, firstAnswerDown] = [v.step, v.firstAnswerUp, v.highest, v.firstAnswerDown].map(x => typeof x === 'number' ? x : NaN)
  if (![step, firstAnswerUp, highest, firstAnswerDown].every(Number.isFinite)) return {}
  try { return { ...deadBand({ step: step!, firstAnswerUp: firstAnswerUp!, highest: highest!, firstAnswerDown: firstAnswerDown! }) } }
  catch (error) { throw new Refusal(422, 'invalid_input', (error as Error).message, { issues: [{ path: 'entry.values', message: (error as Error).message }] }) }
}

async function saveTuning(trx: Knex.Transaction, actor: Actor, ticket: TicketRow, entry: Extract<Entry, { kind: 'tuning' }>, when: Date): Promise<void> {
  const loop = ticket.loops.find(l => l.tag === entry.tag)
  if (!loop) throw new Refusal(422, 'invalid_input', `${entry.tag} is not a loop of this ticket.`, { issues: [{ path: 'entry.tag', message: 'not of this ticket' }] })
  if (entry.stage === 'asLeft' && (await getSettings(trx)).changeNumberRequired && !entry.changeNumber?.trim()) {
    throw new Refusal(422, 'invalid_input', 'This site asks for the management-of-change number with every change of tuning.', { issues: [{ path: 'changeNumber', message: 'required' }] })
  }
  await insertTuningRecord(trx, { loopId: loop.id, ticketId: ticket.id, userId: actor.userId, actor: actor.name, kind: entry.stage, tuning: entry.tuning, reason: entry.reason, changeNumber: entry.changeNumber ?? null, at: when })
}
