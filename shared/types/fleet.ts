import type { ControllerForm } from '../control/types'
import type { LedgerState, LoopType, Verdict } from '../assessment/types'
import type { TicketState } from './tickets'

/** Figures of a loop-week that the fleet table shows; the meanings are a contract. null: it cannot be told. */
export const FLEET_MEASURES = [
  'coverage', 'serviceFactor', 'saturationFraction', 'iaePerHour', 'iaePercentSpan', 'offset', 'standardDeviation', 'timeInTolerance',
  'oscillationIndex', 'oscillationPeriod', 'oscillationAmplitude', 'oscillationStrength',
  'varianceRatio', 'varianceRatioLow', 'varianceRatioHigh', 'headroom', 'valveTravelPerDay', 'reversalsPerDay', 'compressionFactor',
] as const
export type FleetMeasure = typeof FLEET_MEASURES[number]

/** Keys by which the table can be sorted, beside `hours.<state>`. */
export const FLEET_SORT_KEYS = [
  'tag', 'description', 'area', 'unit', 'type', 'priority', 'verdict', 'confidence', 'lostHours', 'weightedLostHours', 'change', 'group', 'openTicket',
  ...FLEET_MEASURES,
] as const

export interface LoopRow extends Record<FleetMeasure, number | null> {
  tag: string
  description: string
  area: string
  unit: string
  type: LoopType
  priority: 1 | 2 | 3
  pvUnit: string
  form: ControllerForm
  verdict: Verdict
  confidence: number | null
  /** of `cannotTell`: why */
  reason: string | null
  lostHours: number
  weightedLostHours: number
  /** weighted lost hours against the week before; null when that was not assessed */
  change: number | null
  hours: Record<LedgerState, number>
  ribbon: string
  /** letter of the group it hunts with */
  group: string | null
  /** number of its newest ticket that is not closed */
  openTicket: number | null
  openTicketState: TicketState | null
  /** set aside until then by somebody, with a reason */
  setAside: { until: string, reason: string } | null
}

/** Sums over all loops that the filters let through, whatever the limit. */
export interface FleetSummary {
  loops: number
  lostHours: number
  /** lost hours against the week before, over the loops assessed in both; null when none was */
  change: number | null
  hours: Record<LedgerState, number>
  /** loops that lost more than 20 hours */
  overTwenty: number
  setAside: number
}

export interface FleetGroup { letter: string, period: number, members: number, likelySource: string | null }

export interface FleetAnswer {
  week: string
  total: number
  rows: LoopRow[]
  summary: FleetSummary
  /** groups of loops that oscillate together in this week, largest first */
  groups: FleetGroup[]
  /** loops of the site without any record in this week */
  missing: number
}

export interface WeekItem { week: string, loops: number, lostHours: number }
export interface WeeksAnswer { site: string, zone: string, weeks: WeekItem[] }

export interface SavedView { id: number, name: string, query: string, shared: boolean, mine: boolean, owner: string }
