/**
 * The contract of the assessment: what goes in (a record, a set-up, a week) and what comes out (measures, ledger,
 * verdict, with their explanations). Pure data; both sides, the database mapper and the API read these names.
 */
import type { ControllerAction, ControllerForm, ProcessModel } from '../control/types'

export type LoopType = 'flow' | 'pressure' | 'level' | 'temperature' | 'analysis' | 'other'

/** One state per hour of the week ledger, in order of precedence. */
export const LEDGER_STATES = ['noData', 'down', 'sensor', 'manual', 'saturated', 'hunting', 'offTarget', 'steady'] as const
export type LedgerState = typeof LEDGER_STATES[number]
/** States whose hours are lost. */
export const LOST_STATES = ['manual', 'saturated', 'hunting', 'offTarget', 'sensor'] as const satisfies readonly LedgerState[]
export const RIBBON_LETTERS: Readonly<Record<LedgerState, string>> = {
  noData: '.', down: 'd', sensor: 'x', manual: 'm', saturated: 'u', hunting: 'h', offTarget: 'o', steady: 's',
}

export const VERDICTS = ['steady', 'huntingTuning', 'huntingValve', 'huntingExternal', 'sluggish', 'saturated', 'manual', 'sensor', 'noise', 'cannotTell'] as const
export type Verdict = typeof VERDICTS[number]

/** A loop as the assessment needs it. Engineering units are the loop's own; times in seconds. */
export interface LoopSetup {
  tag: string
  type: LoopType
  pvLow: number
  pvHigh: number
  pvUnit: string
  /** Output limits, usually 0 and 100. */
  opLow: number
  opHigh: number
  /** Upper-case words, e.g. AUTO, CAS. A record without MODE is taken as in a normal mode. */
  normalModes: string[]
  /** Half width of the tolerance band around the set point, PV unit. */
  tolerance: number
  priority: 1 | 2 | 3
  /** Dead time of the process, s; null when unknown. */
  deadTimeS: number | null
  /** Settling horizon, s, by loop type unless set (our defaults). */
  settlingS: number
  form: ControllerForm
  action: ControllerAction
  /** Proportional gain, % of OP span per % of PV span, positive; null when unknown. */
  gain: number | null
  integralTimeS: number | null
  derivativeTimeS: number | null
  filterTimeS: number | null
  setpointWeight: number | null
  /** Full width of the on-off band, PV unit. */
  hysteresis: number | null
  upstream: string[]
}

/** Code in `LoopRecord.mode` for a sample whose mode is not known. */
export const MODE_UNKNOWN = 255

/** One loop's samples, ascending in time. All arrays have the length of `t`. NaN: missing. */
export interface LoopRecord {
  /** epoch, ms, UTC, strictly ascending; not necessarily regular */
  t: Float64Array
  pv: Float64Array
  /** null: the signal is not in the record at all */
  sp: Float64Array | null
  op: Float64Array | null
  /** index into `modeNames`, or MODE_UNKNOWN */
  mode: Uint8Array | null
  /** upper-case */
  modeNames: string[]
}

/** An ISO week in the site's time zone: 167, 168 or 169 hours. */
export interface WeekFrame {
  /** e.g. `2026-W48` */
  id: string
  /** epoch ms of the begin of each hour and, last, the end of the week: length hours + 1 */
  hourEdges: Float64Array
}

/** [fromMs, toMs), epoch ms */
export interface TimeSpan { fromMs: number, toMs: number }

/** Data too poor to judge. Never a made-up number instead. */
export interface Insufficient { status: 'insufficient', reason: string }
export const insufficient = (reason: string): Insufficient => ({ status: 'insufficient', reason })
export const isInsufficient = (x: unknown): x is Insufficient =>
  typeof x === 'object' && x !== null && (x as { status?: unknown }).status === 'insufficient'

/** Figures of a loop-week; the meanings are a contract (see the public interface). null: it cannot be told. */
export interface Measures {
  coverage: number
  serviceFactor: number | null
  saturationFraction: number | null
  saturationLowFraction: number | null
  saturationHighFraction: number | null
  iaePerHour: number | null
  iaePercentSpan: number | null
  offset: number | null
  standardDeviation: number | null
  timeInTolerance: number | null
  oscillationIndex: number | null
  oscillationPeriod: number | null
  oscillationAmplitude: number | null
  oscillationStrength: number | null
  /** share of the week's usable time spent oscillating */
  oscillationShare: number | null
  varianceRatio: number | null
  varianceRatioLow: number | null
  varianceRatioHigh: number | null
  headroom: number | null
  valveTravelPerDay: number | null
  reversalsPerDay: number | null
  compressionFactor: number | null
  quantisation: number | null
  frozenFraction: number | null
  outOfRangeFraction: number | null
  idleIndex: number | null
  areaIndex: number | null
  setpointMoves: number | null
  overshoot: number | null
  riseTimeS: number | null
  settlingTimeS: number | null
  decayRatio: number | null
  /** on-off loops only */
  onOffPeriodS: number | null
  onOffSwing: number | null
  onOffDuty: number | null
  switchingsPerDay: number | null
  /** apparent stiction, % of OP span */
  apparentStiction: number | null
  apparentStictionLow: number | null
  apparentStictionHigh: number | null
}
export type MeasureKey = keyof Measures

/** How a number was made: enough to repeat it by hand. */
export interface Explanation {
  measure: MeasureKey
  /** a sentence */
  method: string
  /** author, year, title; or "definition" / "common practice, no source" */
  source: string
  window: TimeSpan
  samples: number
  parameters: Record<string, number | string | null>
  intermediates: Record<string, number | string | null>
}

export interface Withheld { measure: MeasureKey, reason: string }

export interface EvidenceItem {
  /** plain name of what was looked at, e.g. `shape of OP half-cycles` */
  measure: string
  value: number | string | null
  threshold: number | string | null
  says: 'for' | 'against' | 'silent'
  /** natural logarithm of the likelihood ratio, positive speaks for the verdict */
  weight: number
  source: string
  /** one sentence for a person */
  text: string
}

export interface Finding {
  verdict: Verdict
  /** calibrated probability 0..1 */
  confidence: number
  hours: number
  evidence: EvidenceItem[]
  /** for cannotTell: why */
  reason?: string
}

/** One detected oscillation of the control error (or of PV where there is no SP). */
export interface Oscillation {
  periodS: number
  periodSdS: number
  /** half of the peak-to-peak swing, PV unit */
  amplitude: number
  /** r of Thornhill, Huang, Zhang 2003 */
  regularity: number
  /** Miao, Seborg 1999 */
  decay: number
  /** share of the error's variance */
  strength: number
  /** when it was there */
  episodes: TimeSpan[]
}

export interface SetpointResponse {
  atMs: number
  from: number
  to: number
  overshootFraction: number | null
  riseTimeS: number | null
  settlingTimeS: number | null
  decayRatio: number | null
  iae: number | null
  settled: boolean
}

export interface ValveTest {
  name: string
  source: string
  /** where the test may speak */
  domain: string
  value: number | null
  threshold: string
  says: 'sticking' | 'sound' | 'undecided' | 'withheld'
  /** why withheld or how to read it */
  note: string
}

export interface LoopWeekAssessment {
  week: string
  methodVersion: string
  ribbon: string
  hours: Record<LedgerState, number>
  lostHours: number
  measures: Measures
  withheld: Withheld[]
  explanations: Explanation[]
  verdict: Verdict
  confidence: number
  /** for cannotTell and others: one sentence */
  verdictReason: string
  findings: Finding[]
  /** of the verdict, strongest first */
  evidence: EvidenceItem[]
  nextActions: { operator: string, technician: string, engineer: string }
  oscillations: Oscillation[]
  responses: SetpointResponse[]
  valveTests: ValveTest[]
  /** thinned for drawing: at most 400 points each */
  rhythm: { lagS: number[], autocorrelation: number[], periodS: number[], power: number[] } | null
  /** a hunting stretch for the PV-OP plot, at most 600 points */
  pvOp: { op: number[], pv: number[], window: TimeSpan } | null
  /** ratio as function of the horizon */
  benchmarkByHorizon: { horizonS: number[], ratio: number[] } | null
  /** Welch spectrum of the main band for grouping, if any */
  model: ProcessModel | null
}
