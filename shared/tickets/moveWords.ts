import type { TicketState } from '../types/tickets'

/** What a move is called on its button. `closed` has a form of its own. */
export function moveWords(from: TicketState, to: TicketState): string {
  if (to === 'assigned') return from === 'inWork' ? 'Give it to somebody else' : 'Assign'
  if (to === 'inWork') return from === 'toVerify' ? 'Send back to work' : 'Start work'
  if (to === 'toVerify') return 'Hand back to verify'
  if (to === 'open') return from === 'dropped' ? 'Take up again' : 'Put back to open'
  if (to === 'dropped') return 'Drop the ticket'
  return 'Close'
}

/** What has to happen next, as a sentence for the person who looks. */
export function nextStep(ticket: { state: TicketState, assignee: string | null, mayWork: boolean }, openChecks: number): string {
  const { state, assignee, mayWork } = ticket
  if (state === 'open') return 'Nobody has this ticket yet. An engineer assigns it.'
  if (state === 'assigned') return mayWork ? 'Read the evidence, get the permit that your site asks for, tell the operator, then start work.' : `${assignee ?? 'Somebody'} has this ticket and has not begun yet.`
  if (state === 'inWork') return !mayWork ? `${assignee ?? 'Somebody'} is at work on it.` : openChecks > 0 ? `${openChecks === 1 ? 'One check is' : `${openChecks} checks are`} still to be answered before handing back.` : 'All checks are answered. Hand it back, so that the data can prove the work.'
  if (state === 'toVerify') return 'The work is done. Compare the data before and after, then close the ticket or send it back.'
  if (state === 'closed') return 'Closed. Fettle watches the loop for eight weeks and opens a follow-up if it slides back.'
  return 'Dropped. An engineer can take it up again.'
}
