import type { Verdict } from '../assessment/types'
import type { Outcome, TicketState } from '../types/tickets'

export interface DigestLoop { tag: string, description: string, area: string, ribbon: string, lostHours: number, change: number | null, verdict: Verdict, form: string, confidence: number | null }
export interface DigestTicket { id: number, title: string, state: TicketState, dueOn: string | null, assignee: string | null, overdue: boolean }
export interface DigestWin { ticketId: number, title: string, hoursPerWeek: number, provisional: boolean, outcome: Outcome | null }
export interface DigestSlideBack { ticketId: number, followUpId: number, title: string }

/** What one person's digest of a week says. */
export interface DigestModel {
  siteName: string
  week: string
  zone: string
  /** areas followed, or empty for all */
  areas: string[]
  loops: number
  lostHours: number
  /** against the week before, over the loops assessed in both; null when none was */
  change: number | null
  byState: { state: string, hours: number }[]
  /** at most ten, new or worse than the week before, worst first */
  worst: DigestLoop[]
  better: DigestLoop[]
  groups: { letter: string, periodS: number, members: number, source: string | null }[]
  tickets: DigestTicket[]
  wins: DigestWin[]
  slidBack: DigestSlideBack[]
  publicUrl: string
}
