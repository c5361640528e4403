import type { Database } from '../../../db/knex'
import { listLoops } from '../../../db/repositories/loops'
import { findTicket, listFollowUps, listTicketEvents, listTicketFiles, listWatchers } from '../../../db/repositories/tickets'
import { listTuningOfTicket } from '../../../db/repositories/tuningRecords'
import { FIELD_CAUTIONS, fieldChecks } from '../../../shared/tickets/fieldChecks'
import { legalMoves } from '../../../shared/tickets/moves'
import { atLeast } from '../../../shared/types/people'
import { getSettings } from '../settings'
import { noSuchTicket } from './refusals'
import type { Actor } from './caller'

/** A ticket with its history, files, watchers, the moves that this person may make and the checks that fit its loops. */
export async function readTicket(db: Database, actor: Actor, id: number) {
  const ticket = await findTicket(db, id)
  if (!ticket) throw noSuchTicket()
  const [events, files, watchers, loops, tuning, followUps, settings] = await Promise.all([
    listTicketEvents(db, id), listTicketFiles(db, id), listWatchers(db, id), listLoops(db, ticket.loops.map(l => l.id)), listTuningOfTicket(db, id), listFollowUps(db, id), getSettings(db),
  ])
  const isAssignee = ticket.assigneeId !== null && ticket.assigneeId === actor.userId
  return {
    ...ticket, events, watchers: watchers.map(w => ({ id: w.id, name: w.name })), tuning, followUps,
    files: files.map(({ key: _, ...file }) => file),
    watching: watchers.some(w => w.id === actor.userId),
    moves: legalMoves(ticket.state, { role: actor.role, isAssignee }),
    mayWork: (atLeast(actor.role, 'engineer') || (actor.role === 'technician' && isAssignee)) && ticket.state !== 'closed' && ticket.state !== 'dropped',
    loops: ticket.loops.map((loop) => {
      const now = loops.find(l => l.id === loop.id)
      return {
        ...loop, unit: now?.unit ?? '', pvUnit: now?.pvUnit ?? '', checks: fieldChecks(ticket.evidence.find(e => e.tag === loop.tag)?.verdict ?? 'cannotTell'),
        // the controller's own form and units, as in the loop's set-up
        tuning: now ? { form: now.form, gainUnit: now.gainUnit, timeUnit: now.timeUnit, gain: now.gain, integralTime: now.integralTime, derivativeTime: now.derivativeTime, filterTimeS: now.filterTimeS, setpointWeight: now.setpointWeight, hysteresis: now.hysteresis } : null,
      }
    }),
    cautions: FIELD_CAUTIONS, changeNumberRequired: settings.changeNumberRequired,
  }
}
