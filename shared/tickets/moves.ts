import type { Role } from '../types/people'
import type { TicketState } from '../types/tickets'

export interface Mover { role: Role, isAssignee: boolean }

type Rule = { to: TicketState, may: (m: Mover) => boolean, needs?: 'assignee' | 'reason' }

const engineer = (m: Mover) => m.role === 'engineer' || m.role === 'admin'
const worker = (m: Mover) => engineer(m) || (m.role === 'technician' && m.isAssignee)

/** Legal moves of a ticket. `closed` is reached only through the close call, which asks for the proof. */
const rules: Record<TicketState, Rule[]> = {
  open: [{ to: 'assigned', may: engineer, needs: 'assignee' }, { to: 'dropped', may: engineer, needs: 'reason' }],
  assigned: [{ to: 'inWork', may: worker }, { to: 'open', may: engineer }, { to: 'dropped', may: engineer, needs: 'reason' }],
  inWork: [{ to: 'toVerify', may: worker }, { to: 'assigned', may: engineer, needs: 'assignee' }, { to: 'dropped', may: engineer, needs: 'reason' }],
  toVerify: [{ to: 'closed', may: engineer }, { to: 'inWork', may: engineer, needs: 'reason' }, { to: 'dropped', may: engineer, needs: 'reason' }],
  closed: [],
  dropped: [{ to: 'open', may: engineer }],
}

/** The states that this person may move the ticket to. */
export function legalMoves(from: TicketState, mover: Mover): TicketState[] {
  return rules[from].filter(rule => rule.may(mover)).map(rule => rule.to)
}

/** null when the move is legal, else what stands in the way, as a sentence. */
export function objectionToMove(from: TicketState, to: TicketState, mover: Mover, given: { assignee: boolean, reason: boolean }): { code: 'illegal_move' | 'not_allowed' | 'needs_assignee' | 'needs_reason', message: string } | null {
  const rule = rules[from].find(r => r.to === to)
  if (!rule) return { code: 'illegal_move', message: `A ticket that is ${from} cannot become ${to}.` }
  if (!rule.may(mover)) return { code: 'not_allowed', message: mover.role === 'technician' ? 'Only the person assigned, or an engineer, may do this.' : 'This needs an engineer.' }
  if (rule.needs === 'assignee' && !given.assignee) return { code: 'needs_assignee', message: 'Say who takes the ticket.' }
  if (rule.needs === 'reason' && !given.reason) return { code: 'needs_reason', message: 'Say why, in a few words.' }
  return null
}
