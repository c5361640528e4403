import type { Database } from '../../../db/knex'
import { listTickets as list, type TicketFilter, type TicketRow } from '../../../db/repositories/tickets'
import type { TicketItem } from '../../../shared/types/tickets'
import { getSettings } from '../settings'
import { dayIn } from '../../../shared/format/dayIn'

/** Tickets for a list or a board; what is overdue goes by the calendar of the site. */
export async function listTickets(db: Database, filter: Omit<TicketFilter, 'today'>, now = new Date()): Promise<{ total: number, rows: TicketItem[] }> {
  const today = dayIn((await getSettings(db)).zone, now)
  const { total, rows } = await list(db, { ...filter, today })
  return { total, rows: rows.map(row => item(row, today)) }
}

function item(t: TicketRow, today: string): TicketItem {
  const first = t.evidence[0]
  return {
    id: t.id, title: t.title, state: t.state, priority: t.priority, dueOn: t.dueOn, overdue: t.dueOn !== null && t.dueOn < today && t.state !== 'closed' && t.state !== 'dropped',
    assigneeId: t.assigneeId, assignee: t.assignee, loops: t.loops.map(({ tag, description, area }) => ({ tag, description, area })), week: t.week,
    verdict: first?.verdict ?? 'cannotTell', lostHours: t.evidence.reduce((sum, e) => sum + e.lostHours, 0), ribbon: first?.ribbon ?? '',
    outcome: t.outcome, proof: t.proof && { verdict: t.proof.verdict, provisional: !t.proofFinal }, followUpOf: t.followUpOf, version: t.version, createdAt: t.createdAt, closedAt: t.closedAt,
  }
}
