import type { LedgerState } from '../assessment/types'
import type { CommonUpset } from '../ribbon/commonUpsets'
import type { FleetGroup } from './fleet'
import type { TicketState } from './tickets'

type Hours = Record<LedgerState, number>

export interface PlantArea {
  area: string
  loops: number
  hours: Hours
  lostHours: number
  weightedLostHours: number
  /** lost hours against the week before, over the loops assessed in both; null when none was */
  change: number | null
  /** ordered so that common upsets lie together */
  ribbons: { tag: string, ribbon: string, lostHours: number }[]
  upsets: CommonUpset[]
}

export interface DueTicket { id: number, title: string, state: TicketState, dueOn: string | null, assignee: string | null, loops: string[], overdue: boolean }

export interface PlantAnswer {
  week: string
  loops: number
  /** loops of the site without any record in this week */
  missing: number
  hours: Hours
  lostHours: number
  change: number | null
  /** change of the hours in each state, over the loops assessed in both weeks */
  hoursChange: Hours | null
  areas: PlantArea[]
  groups: FleetGroup[]
  /** due within seven days or overdue, soonest first */
  tickets: DueTicket[]
  openTickets: number
}
