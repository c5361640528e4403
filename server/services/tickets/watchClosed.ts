import type { Knex } from 'knex'
import { listShelvedLoopIds } from '../../../db/repositories/loopPage'
import { listLoops } from '../../../db/repositories/loops'
import { hasFollowUp, insertTicketEvent, listPeopleOfTicket, listWatchedClosedTickets, lockTicket, updateTicket, type TicketRow } from '../../../db/repositories/tickets'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import type { LoopProof } from '../../../shared/types/tickets'
import { getSettings, type SiteSettings } from '../settings'
import { notifySlideBack } from './notifications'
import { openTicketIn } from './openTicket'
import { proofWindows, proveTicket } from './proveTicket'

const WATCHED_WEEKS = 8
const WEEK_MS = 7 * 24 * 3_600_000
/** Eight looks share one error rate of 5 % (Bonferroni), so that watching longer accuses nobody more often. */
const LEVEL = 1 - 0.05 / WATCHED_WEEKS
/** Fewer lost hours than these are no slide back, however sure: ours. */
const WORTH_HOURS = 4

const fettle = { userId: null, name: 'Fettle', role: 'engineer' as const }

/**
 * Looks at closed tickets when a week was assessed: a provisional proof becomes final with the next comparable week; a
 * proven loop that is worse again within eight weeks opens one follow-up and tells those who closed and worked. Safe to
 * run again for the same week. A failure concerns one ticket and never holds up the week.
 */
export async function watchClosed(trx: Knex.Transaction, week: string): Promise<void> {
  const settings = await getSettings(trx)
  const edges = weekFrame(week, settings.zone).hourEdges
  const span = { fromMs: edges[0]!, toMs: edges[edges.length - 1]! }
  for (const ticket of await listWatchedClosedTickets(trx, new Date(span.toMs - (WATCHED_WEEKS + 1) * WEEK_MS))) {
    try { await trx.transaction(inner => look(inner, ticket, week, span, settings)) }
    catch (error) { console.error(`Watching ticket ${ticket.id}:`, error) }
  }
}

async function look(trx: Knex.Transaction, ticket: TicketRow, week: string, span: { fromMs: number, toMs: number }, settings: SiteSettings): Promise<void> {
  // the windows that were known before this week: it must not be compared with itself
  const proof = ticket.proof
  if (!ticket.proofFinal) await finalise(trx, ticket)
  const until = Math.max(ticket.closedAt?.getTime() ?? 0, ticket.workDoneAt?.getTime() ?? 0) + WATCHED_WEEKS * WEEK_MS
  if (proof?.verdict !== 'better' || span.fromMs > until || await hasFollowUp(trx, ticket.id)) return
  const loops = await listLoops(trx, ticket.loops.map(l => l.id))
  const shelved = new Set(await listShelvedLoopIds(trx, new Date()))
  for (const own of proof.loops as LoopProof[]) {
    const loop = loops.find(l => l.tag === own.tag)
    // only a week that the proof has not seen is new evidence
    if (!loop || shelved.has(loop.id) || own.verdict !== 'better' || span.fromMs < own.after.toMs) continue
    const now = await proofWindows(trx, loop, settings).compare(own.after, span, ticket.id * 1000 + Number(week.slice(5).replace('W', '')), LEVEL)
    const lost = now.lostHoursWonPerWeek
    if (now.verdict !== 'worse' || !lost || lost.high >= 0 || lost.value > -WORTH_HOURS) continue
    const locked = await lockTicket(trx, ticket.id)
    if (!locked || await hasFollowUp(trx, ticket.id)) return
    const title = `${loop.tag} slid back after ticket ${ticket.id}`
    const reason = `${Math.round(-lost.value)} lost hours a week more than after the work (${Math.round(-lost.high)} to ${Math.round(-lost.low)}, interval for ${WATCHED_WEEKS} looks).`
    const followUpId = await openTicketIn(trx, fettle, { tags: ticket.loops.map(l => l.tag), week, title, priority: ticket.priority, note: reason, followUpOf: ticket.id })
    await insertTicketEvent(trx, { ticketId: ticket.id, userId: null, actor: fettle.name, kind: 'slidBack', text: reason, data: { tag: loop.tag, week, followUpId } })
    await notifySlideBack(trx, { ticketId: ticket.id, followUpId, title, people: [...await listPeopleOfTicket(trx, ticket.id), ...(ticket.closedBy ? [ticket.closedBy] : [])] })
    return
  }
}

/** The proof again with what has come in; stored only when it is final, so that no look between counts. */
async function finalise(trx: Knex.Transaction, ticket: TicketRow): Promise<void> {
  if (!ticket.proof || ticket.proof.chosenByHand) return
  const proof = await proveTicket(trx, ticket.id)
  if (proof.provisional) return
  await lockTicket(trx, ticket.id)
  await updateTicket(trx, ticket.id, { proof, proofFinal: true, proofFinalAt: new Date() })
  await insertTicketEvent(trx, { ticketId: ticket.id, userId: null, actor: fettle.name, kind: 'proofFinal', text: proof.reason, data: { proof: proof.verdict, provisionally: ticket.proof.verdict } })
}
