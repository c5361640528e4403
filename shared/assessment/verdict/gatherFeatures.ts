/**
 * The figures that the likelihood tables know, gathered from the parts of the assessment. NaN: not there.
 */
import type { LoopSetup, Oscillation } from '../types'
import type { Ledger } from '../ledger/buildLedger'
import { OFF_NORMAL, type PreparedRecord } from '../preparation/prepareRecord'
import type { AnalysisSeries } from '../preparation/analysisSeries'
import { firstFrom } from '../preparation/firstFrom'
import type { CycleShape } from './cycleShape'
import type { ErrorCharacter } from './errorCharacter'
import type { HalfCycles } from './halfCycles'
import type { SlipEvents } from './slipEvents'
import type { StandsAndJumps } from './standsAndJumps'
import type { StickRuns } from './stickRuns'
import type { StickFit } from './stickFit'
import type { Recoveries } from './recoveries'
import type { ValvePanel } from './valvePanel'
import type { ReadingCharacter } from './readingCharacter'

export const FEATURES = [
  'huntingShare', 'regularity', 'strength', 'amplitudeOverTolerance',
  'amplitudeVariation', 'periodVariation', 'phaseWander', 'pvThird', 'opThird', 'pvOdd', 'pvEven', 'pvCoherence',
  'halfLengthVariation', 'halfPeakVariation', 'halfRunShare', 'periodOverIntegralTime', 'periodOverDeadTime', 'setpointSwing', 'manualSwing',
  'stickExplained', 'stickGain', 'stickRest', 'slipShare', 'slipCount', 'standingTravel', 'jumpShare', 'halfCycleShape', 'peakAsymmetry', 'stickSlip', 'lagAsymmetry',
  'errorDecayOverSettling', 'staySideOverSettling', 'slowShare', 'recoveryOverSettling', 'swingBack', 'idleIndex',
  'whiteness', 'kurtosis', 'deviationOverTolerance', 'noiseOverTolerance', 'noiseShare', 'burstRatio', 'wildShare', 'offTargetShare',
] as const
/** Figures of the second table, which speaks only where the record is short (`slipTable`). */
export const SHORT_FEATURES = ['jumpSlips', 'jumpSlipShare', 'jumpTravel', 'jumpFollow', 'jumpStandGain', 'jumpOffset', 'jumpSize', 'bendSlips', 'bendSlipShare', 'bendFollow', 'bendOffset', 'bendSize', 'runGain', 'runExplained'] as const
export type FeatureName = typeof FEATURES[number] | typeof SHORT_FEATURES[number]
export type FeatureValues = Record<FeatureName, number>

export interface FeatureParts {
  setup: LoopSetup
  prepared: PreparedRecord
  series: AnalysisSeries | null
  ledger: Ledger
  oscillations: Oscillation[]
  shape: CycleShape | null
  error: ErrorCharacter | null
  reading: ReadingCharacter
  panel: ValvePanel
  upsets: Recoveries | null
  stick: StickFit | null
  slip: SlipEvents | null
  /** null where the record is not short */
  stands: { found: StandsAndJumps, bends: boolean, runs: StickRuns | null } | null
  halves: HalfCycles | null
}

export function gatherFeatures(parts: FeatureParts): FeatureValues {
  const { setup, prepared, series, ledger, oscillations, shape, error, reading } = parts
  const v = Object.fromEntries([...FEATURES, ...SHORT_FEATURES].map(f => [f, NaN])) as FeatureValues
  const o = oscillations[0]
  const { hours } = ledger
  const judgedHours = hours.hunting + hours.offTarget + hours.steady
  const { tolerance } = setup

  if (o && series) {
    const time = o.episodes.reduce((s, e) => s + e.toMs - e.fromMs, 0) / 1000
    v.huntingShare = time / (series.used * series.intervalS)
    v.regularity = Math.log10(o.regularity)
    v.strength = o.strength
    v.amplitudeOverTolerance = o.amplitude / tolerance
    v.periodOverIntegralTime = setup.integralTimeS ? Math.log(o.periodS / setup.integralTimeS) : NaN
    v.periodOverDeadTime = setup.deadTimeS ? Math.log(o.periodS / setup.deadTimeS) : NaN
    if (series.sp) v.setpointSwing = swingAt(series.sp, o.periodS / series.intervalS, spansOf(series, o)) / o.amplitude
    v.manualSwing = manualSwing(prepared, o)
  }
  else {
    v.huntingShare = 0
  }
  if (shape) {
    v.amplitudeVariation = shape.amplitudeVariation
    v.periodVariation = shape.periodVariation
    v.phaseWander = shape.phaseWander
    v.pvThird = shape.pvThird
    v.opThird = shape.opThird
    v.pvOdd = shape.pvOdd
    v.pvEven = shape.pvEven
    v.pvCoherence = shape.pvCoherence
  }
  if (error) {
    v.errorDecayOverSettling = Math.log10(error.decayS / setup.settlingS)
    v.staySideOverSettling = Math.log10(error.staySideS / setup.settlingS)
    v.whiteness = error.whiteness
    v.kurtosis = error.kurtosis
  }
  if (parts.stick) {
    v.stickExplained = parts.stick.explained
    v.stickGain = parts.stick.explained - parts.stick.linear
    v.stickRest = parts.stick.restShare
  }
  Object.assign(v, parts.panel.values)
  if (parts.upsets) {
    v.slowShare = parts.upsets.slowShare
    v.recoveryOverSettling = parts.upsets.recoveryOverSettling
    v.swingBack = parts.upsets.swingBack
    v.idleIndex = parts.upsets.idleIndex
  }
  if (parts.slip && parts.slip.looked >= 2) {
    v.slipShare = parts.slip.slips / parts.slip.looked
    v.slipCount = parts.slip.slips
  }
  if (parts.stands) {
    const { found, bends, runs } = parts.stands
    if (runs) {
      v.runGain = runs.gain
      v.runExplained = runs.explained
    }
    const share = found.looked > 0 ? found.slips / found.looked : NaN
    if (bends) Object.assign(v, { bendSlips: found.slips, bendSlipShare: share, bendFollow: found.follow, bendOffset: found.offset, bendSize: found.size })
    else Object.assign(v, { jumpSlips: found.slips, jumpSlipShare: share, jumpTravel: found.travel, jumpFollow: found.follow, jumpStandGain: found.standGain, jumpOffset: found.offset, jumpSize: found.size })
  }
  if (parts.halves) {
    v.halfLengthVariation = parts.halves.lengthVariation
    v.halfPeakVariation = parts.halves.peakVariation
    v.halfRunShare = parts.halves.count >= 12 ? parts.halves.inRuns / parts.halves.count : NaN
  }
  const sd = error ? error.deviation : NaN
  v.deviationOverTolerance = sd / tolerance
  v.noiseOverTolerance = reading.noise / tolerance
  v.noiseShare = sd > 0 ? Math.min(1, (reading.noise / sd) ** 2) : NaN
  v.burstRatio = Math.log10(reading.burstRatio)
  v.wildShare = reading.wildShare
  v.offTargetShare = judgedHours > 0 ? hours.offTarget / judgedHours : NaN
  return v
}

/** Block indices of an oscillation's episodes. */
export function spansOf(series: AnalysisSeries, o: Oscillation): [number, number][] {
  return o.episodes.map(e => [firstFrom(series.t, e.fromMs), firstFrom(series.t, e.toMs)])
}

/** Amplitude of x at a period (samples), in windows of 8 periods so that a wandering phase does not cancel it; NaN without data. */
function swingAt(x: Float64Array, period: number, spans: [number, number][]): number {
  const window = Math.max(8, Math.round(8 * period))
  let squares = 0
  let count = 0
  for (const [from, to] of spans) {
    for (let begin = from; begin + window <= to && count < 40; begin += window) {
      const a = amplitudeAt(x, begin, window, period)
      if (a === a) {
        squares += a * a
        count++
      }
    }
  }
  return count > 0 ? Math.sqrt(squares / count) : NaN
}

function amplitudeAt(x: Float64Array, begin: number, window: number, period: number): number {
  let re = 0
  let im = 0
  let mean = 0
  for (let i = 0; i < window; i++) mean += x[begin + i]
  mean /= window
  if (mean !== mean) return NaN
  for (let i = 0; i < window; i++) {
    const w = 1 - Math.cos((2 * Math.PI * (i + 0.5)) / window)
    const angle = (2 * Math.PI * i) / period
    re += w * (x[begin + i] - mean) * Math.cos(angle)
    im += w * (x[begin + i] - mean) * Math.sin(angle)
  }
  return (2 * Math.hypot(re, im)) / window
}

/**
 * A free test: PV's swing at the oscillation's period while the loop stands in manual, over its swing while it hunts. NaN when there is
 * no stretch of manual of 4 periods; the first period is left out, since the swing needs time to die down.
 */
function manualSwing(prepared: PreparedRecord, o: Oscillation): number {
  const period = o.periodS / prepared.intervalS
  const { flags, pv, n } = prepared
  const window = Math.round(3 * period)
  let best = NaN
  let run = 0
  for (let i = 0; i <= n; i++) {
    if (i < n && (flags[i] & OFF_NORMAL) !== 0 && pv[i] === pv[i]) run++
    else {
      if (run >= 4 * period) {
        const a = amplitudeAt(pv, i - window, window, period)
        if (a === a && !(a > best)) best = a
      }
      run = 0
    }
  }
  return best / o.amplitude
}
