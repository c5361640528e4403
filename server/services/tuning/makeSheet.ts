import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { insertChangeSheet } from '../../../db/repositories/changeSheets'
import { findLoopWeek } from '../../../db/repositories/loopPage'
import { findLoop } from '../../../db/repositories/loops'
import { insertTicketEvent, lockTicket } from '../../../db/repositories/tickets'
import type { MakeSheetInput } from '../../../shared/schemas/tuning'
import { composeSheet } from '../../../shared/tuning/composeSheet'
import { storedController } from '../../../shared/tuning/storedController'
import { loopSetup } from '../loops/loopSetup'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'
import type { Actor } from '../tickets/caller'

/** Writes a change sheet, and puts it on a ticket of the loop when one is named: there its prediction is what the proof is held to. */
export async function makeSheet(db: Knex, actor: Actor, tag: string, input: MakeSheetInput): Promise<{ id: number, expectedIaeRatio: number | null }> {
  return db.transaction(async (trx) => {
    const loop = await findLoop(trx, tag)
    if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
    if (loop.version !== input.version) throw new Refusal(409, 'changed_meanwhile', `The set-up of ${tag} was changed meanwhile; load the page again and compare with the tuning that stands there now.`, { version: loop.version })
    if (loop.form === 'onOff') throw new Refusal(409, 'on_off', `${tag} is an on-off loop; a change sheet is for PID tuning.`)
    const settings = await getSettings(trx)
    if (settings.changeNumberRequired && !input.changeNumber) throw new Refusal(422, 'invalid_input', 'This site asks for the management-of-change number with every change of tuning.', { issues: [{ path: 'changeNumber', message: 'required by this site' }] })
    const ticket = input.ticketId ? await lockTicket(trx, input.ticketId) : null
    if (input.ticketId && !ticket?.loops.some(l => l.tag === tag)) throw new Refusal(422, 'invalid_input', `Ticket ${input.ticketId} is not about ${tag}.`, { issues: [{ path: 'ticketId', message: 'not a ticket of this loop' }] })
    if (ticket && (ticket.state === 'closed' || ticket.state === 'dropped')) throw new Refusal(409, 'ticket_closed', `Ticket ${ticket.id} is ${ticket.state}.`, { state: ticket.state })
    const assessed = input.week ? await findLoopWeek(trx, loop.id, input.week) : null
    const setup = loopSetup(loop, settings)
    const composed = composeSheet(input, {
      loop: { tag, description: loop.description, area: loop.area, unit: loop.unit, type: loop.type, pvUnit: setup.pvUnit, pvLow: setup.pvLow, pvHigh: setup.pvHigh, opLow: setup.opLow, opHigh: setup.opHigh },
      asFound: storedController(loop), verdict: assessed?.detail.verdict ?? null, verdictConfidence: assessed?.detail.confidence ?? null,
    })
    if (composed.status === 'refused') throw new Refusal(422, 'unsafe_change', composed.reason, { issues: [{ path: composed.path, message: composed.reason }] })
    const { sheet } = composed
    const id = await insertChangeSheet(trx, { loopId: loop.id, ticketId: ticket?.id ?? null, userId: actor.userId, sheet })
    const { expectedIaeRatio } = sheet.benefit
    if (ticket) await insertTicketEvent(trx, { ticketId: ticket.id, userId: actor.userId, actor: actor.name, kind: 'changeSheet', text: input.reasons, data: { sheetId: id, tag, rule: sheet.rule, expectedIaeRatio, changeNumber: sheet.changeNumber } })
    await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: 'changeSheet.make', entity: 'changeSheet', entityId: id, data: { tag, ticketId: ticket?.id ?? null, rule: sheet.rule, expectedIaeRatio } })
    return { id, expectedIaeRatio }
  })
}
