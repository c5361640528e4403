import type { EvidenceItem, LoopWeekAssessment, SetpointResponse } from '../assessment/types'
import type { LoopChange } from '../schemas/loops'
import type { FleetGroup, LoopRow } from './fleet'
import type { Outcome, TicketState } from './tickets'

type ByType = Record<'flow' | 'pressure' | 'level' | 'temperature' | 'analysis' | 'other', number>
/** Times are ISO 8601 as they arrive in JSON. */
export interface LoopPage extends Partial<LoopRow> {
  /** the group it hunts with, whole */
  groupOf: FleetGroup | null
  tag: string
  week: string | null
  zone: string
  weekFrom: number | null
  weekTo: number | null
  configuration: Required<Omit<LoopChange, 'area' | 'version'>> & { tag: string, area: string | null, version: number, rangeGuessed: boolean }
  settings: { toleranceByType: ByType, settlingByType: ByType }
  assessment: LoopWeekAssessment | null
  evidence: EvidenceItem[]
  responses: SetpointResponse[]
  assessedAt: string | null
  methodVersion: string | null
  assessedWithVersion: number | null
  changeMark: 'worse' | 'better' | null
  changeSince: string | null
  weeks: { week: string, ribbon: string, lostHours: number, verdict: string, confidence: number | null, methodVersion: string, loopVersion: number, assessedAt: string, iaePercentSpan: number | null, varianceRatio: number | null }[]
  earlier: { week: string, methodVersion: string, loopVersion: number, assessedAt: string, lostHours: number, verdict: string, cause: string }[]
  tuning: { id: number, at: string, actor: string, kind: 'asFound' | 'asLeft' | 'imported' | 'unrecorded', tuning: Record<string, string | number | null>, reason: string, changeNumber: string | null, ticketId: number | null }[]
  tickets: { id: number, title: string, state: TicketState, assignee: string | null, dueOn: string | null, outcome: Outcome | null, closedAt: string | null }[]
  setAsides: { id: number, verdict: string, week: string, reason: string, untilAt: string, by: string | null, createdAt: string, endedAt: string | null }[]
  shelving: { id: number, untilAt: string, reason: string, by: string | null } | null
  concerns: { id: number, text: string, by: string | null, createdAt: string }[]
  dataFrom: string | null
  dataTo: string | null
}
