import type { EvidenceItem, Verdict } from '../assessment/types'
import type { FieldCheck } from '../tickets/fieldChecks'

export const TICKET_STATES = ['open', 'assigned', 'inWork', 'toVerify', 'closed', 'dropped'] as const
export type TicketState = typeof TICKET_STATES[number]

export const OUTCOMES = ['retuned', 'valveRepaired', 'sensorRepaired', 'processChanged', 'workedAround', 'notAProblem'] as const
export type Outcome = typeof OUTCOMES[number]

export const STATE_WORDS: Record<TicketState, string> = {
  open: 'open', assigned: 'assigned', inWork: 'in work', toVerify: 'to verify', closed: 'closed', dropped: 'dropped',
}
export const OUTCOME_WORDS: Record<Outcome, string> = {
  retuned: 'retuned', valveRepaired: 'valve repaired', sensorRepaired: 'sensor repaired', processChanged: 'process changed',
  workedAround: 'worked around', notAProblem: 'not a problem',
}

/** What was known about a loop when the ticket was opened; kept as it was, whatever is assessed later. */
export interface KeptEvidence {
  tag: string
  week: string
  verdict: Verdict
  confidence: number | null
  lostHours: number
  ribbon: string
  reason: string
  evidence: EvidenceItem[]
}

/** An estimate with its 95 % interval. */
export interface Interval { value: number, low: number, high: number }

export const PROOF_VERDICTS = ['better', 'noChange', 'worse', 'cannotTell'] as const
export type ProofVerdict = typeof PROOF_VERDICTS[number]

export interface ProofWindow { fromMs: number, toMs: number }

export interface ProofCheck { name: string, ok: boolean, text: string }

export interface LoopProof {
  tag: string
  verdict: ProofVerdict
  /** one sentence */
  reason: string
  /** until one more comparable week has come in */
  provisional: boolean
  before: ProofWindow
  after: ProofWindow
  /** after / before; below 1 is better. null where it cannot be told */
  iaeRatio: Interval | null
  varianceRatio: Interval | null
  /** before - after, hours a week; above 0 is better */
  lostHoursWonPerWeek: Interval | null
  checks: ProofCheck[]
  method: string
  source: string
  /** bins of ten minutes in a normal mode */
  samplesBefore: number
  samplesAfter: number
  blockLength: number | null
  seed: number
}

export interface TicketProof {
  verdict: ProofVerdict
  /** one sentence */
  reason: string
  provisional: boolean
  loops: LoopProof[]
  /** windows were given by a person instead of chosen by the program */
  chosenByHand: boolean
  workBeganAt: string | null
  workDoneAt: string | null
}

/** Answer to a field check. */
export interface CheckAnswer { values: Record<string, string | number | null>, at: string, by: string }
/** by tag, then by check */
export type TicketChecks = Record<string, Record<string, CheckAnswer>>

/** What a list of tickets needs of one. */
export interface TicketItem {
  id: number
  title: string
  state: TicketState
  priority: 1 | 2 | 3
  dueOn: string | null
  overdue: boolean
  assigneeId: number | null
  assignee: string | null
  loops: { tag: string, description: string, area: string | null }[]
  week: string
  verdict: Verdict
  lostHours: number
  ribbon: string
  outcome: Outcome | null
  proof: { verdict: ProofVerdict, provisional: boolean } | null
  followUpOf: number | null
  version: number
  createdAt: string | Date
  closedAt: string | Date | null
}

export interface TicketEventView { id: number, at: string, userId: number | null, actor: string, kind: string, text: string | null, data: Record<string, unknown> }
export interface TicketFileView { id: number, name: string, mediaType: string, bytes: number, createdAt: string }
export type TuningValues = Record<string, string | number | null>
export interface TicketLoopView { id: number, tag: string, description: string, area: string | null, unit: string, pvUnit: string, checks: FieldCheck[], tuning: TuningValues | null }
export interface TicketTuningView { id: number, tag: string, at: string, actor: string, kind: 'asFound' | 'asLeft' | 'imported' | 'unrecorded', tuning: TuningValues, reason: string, changeNumber: string | null }

/** What stands about a ticket, the same in the database and on its page. */
export interface TicketFacts {
  id: number
  title: string
  state: TicketState
  priority: 1 | 2 | 3
  dueOn: string | null
  assigneeId: number | null
  assignee: string | null
  openedBy: number | null
  opener: string | null
  followUpOf: number | null
  week: string
  evidence: KeptEvidence[]
  checks: TicketChecks
  outcome: Outcome | null
  closeReason: string | null
  proof: TicketProof | null
  proofFinal: boolean
  version: number
}

/** A ticket as its page gets it. */
export interface TicketView extends TicketFacts {
  followUps: number[]
  workDoneAt: string | null
  closedAt: string | null
  createdAt: string
  updatedAt: string
  loops: TicketLoopView[]
  events: TicketEventView[]
  files: TicketFileView[]
  watchers: { id: number, name: string }[]
  watching: boolean
  tuning: TicketTuningView[]
  moves: TicketState[]
  mayWork: boolean
  cautions: string[]
  changeNumberRequired: boolean
}
