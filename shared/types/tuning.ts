import type { Verdict } from '../assessment/types'
import type { Caution } from '../control/safety/changeCautions'
import type { DisplayedController, ProcessModel } from '../control/types'

export const STRETCH_KINDS = ['setpointMove', 'manualMove', 'natural'] as const
export type StretchKind = typeof STRETCH_KINDS[number]

/** 95 % interval; gains in % of PV span per % of OP span (per second for an integrator), times in s. */
export interface ParameterView { value: number, low: number, high: number }
export type ParameterName = 'processGain' | 'timeConstant' | 'timeConstant2' | 'deadTime'

/** One kind of model tried on one or more stretches. `refused`: what was found must not be used for tuning, and why. */
export interface FitView {
  kind: ProcessModel['kind']
  status: 'ok' | 'refused'
  reason: string
  model: ProcessModel | null
  parameters: Partial<Record<ParameterName, ParameterView>>
  fitPercent: number | null
  /** standard deviation of what the model and its noise model leave unexplained, % of PV span */
  residual: number | null
  /** largest autocorrelation of the residual at lags 1..20 in standard errors; above about 3.5 the noise model falls short */
  residualCorrelation: number | null
  samples: number
}

export interface Comparison {
  /** which kind the data support, and why */
  best: ProcessModel['kind']
  reason: string
  fits: FitView[]
}

export interface StretchView {
  /** begin and end, epoch ms: its name in a request */
  fromMs: number
  toMs: number
  kind: StretchKind
  samples: number
  usable: boolean
  /** why not; empty when usable */
  reason: string
  /** part of the joint fit */
  chosen: boolean
  /** ranges of PV and OP, own units */
  pvMove: number
  opMove: number
  /** fitted on its own */
  own: Comparison | null
  /** thinned for drawing; s from the begin, own units. `simulated` by the best kind of the joint fit, null before its lead-in */
  drawing: { t: number[], pv: (number | null)[], sp: (number | null)[] | null, op: (number | null)[], simulated: (number | null)[] | null } | null
}

export interface ModelAnswer {
  tag: string
  fromMs: number
  toMs: number
  /** s between the samples that were fitted: the record's own, or longer where stretches were averaged */
  intervalS: number
  stretches: StretchView[]
  /** stretches that were found but not looked at, because there are so many */
  leftOut: number
  joint: Comparison | null
  /** measurement noise of PV, own unit; null when it cannot be told */
  noise: { standardDeviation: number, intervalS: number } | null
  /** PV at output 0 by the joint model, own unit; null for an integrator */
  restPv: number | null
  /** one sentence when nothing can be fitted */
  reason: string
  method: string
  source: string
}

/** What a change sheet says; kept as it was made, whatever happens to the loop later. PV in the loop's own unit, OP in its own, times in s. */
export interface ChangeSheet {
  loop: { tag: string, description: string, area: string | null, unit: string, type: string, pvUnit: string, pvLow: number, pvHigh: number, opLow: number, opHigh: number }
  week: string | null
  verdict: Verdict | null
  verdictConfidence: number | null
  asFound: DisplayedController | null
  asProposed: DisplayedController
  rule: string
  ruleSource: string | null
  setpointFilterTimeS: number
  model: { origin: 'data' | 'typedIn', process: ProcessModel, fitPercent: number | null, note: string }
  reasons: string
  benefit: {
    /** proposed over as found, simulated; null when it cannot be told */
    expectedIaeRatio: number | null
    setpointIaeRatio: number | null
    sentence: string
    figures: { name: string, asFound: string, asProposed: string }[]
    method: string
  }
  cautions: Caution[]
  stopCriteria: string[]
  wayBack: string
  changeNumber: string | null
}

export interface ChangeSheetView { id: number, tag: string, ticketId: number | null, madeAt: string, madeBy: string, zone: string, sheet: ChangeSheet }
