/**
 * Assesses one loop over one ISO week: measures, ledger, oscillations, benchmark, valve tests, verdict, and how each figure was
 * made. Pure; its arguments are left alone. Cost: some tens of milliseconds for a week at 10 s.
 */
import { errorMeasures } from './error/errorMeasures'
import { onOffCycle } from './error/onOffCycle'
import { valveMovement } from './error/valveMovement'
import { pvOpOf, rhythmOf } from './explanation/drawings'
import { explainBenchmark } from './explanation/explainBenchmark'
import { Explainer } from './explanation/Explainer'
import { explainQuality, middleOf } from './explanation/explainQuality'
import { explainResponses } from './explanation/explainResponses'
import { sentence } from './explanation/sentence'
import { buildLedger, mergeSpans } from './ledger/buildLedger'
import { analysisSeries, type AnalysisSeries } from './preparation/analysisSeries'
import { AT_HIGH, AT_LOW, FROZEN, MODE_KNOWN, OFF_NORMAL, prepareRecord, RECEIVED, type PreparedRecord } from './preparation/prepareRecord'
import { setpointActivity } from './preparation/setpointActivity'
import { frozenSpans } from './quality/frozenSpans'
import { quantisationStep } from './quality/quantisationStep'
import { isInsufficient, type LoopRecord, type LoopSetup, type LoopWeekAssessment, type Oscillation, type TimeSpan, type WeekFrame } from './types'
import { controllerSign } from './verdict/controllerSign'
import { cycleShape } from './verdict/cycleShape'
import { errorCharacter } from './verdict/errorCharacter'
import { fastSwing } from './verdict/fastSwing'
import { findHunting } from './verdict/findHunting'
import { gatherFeatures, spansOf, type FeatureValues } from './verdict/gatherFeatures'
import { halfCycles } from './verdict/halfCycles'
import { judge } from './verdict/judge'
import { readingCharacter } from './verdict/readingCharacter'
import { recoveries } from './verdict/recoveries'
import { slipEvents } from './verdict/slipEvents'
import { standsAndJumps, type StandsAndJumps } from './verdict/standsAndJumps'
import { stickRuns, type StickRuns } from './verdict/stickRuns'
import { stickFit } from './verdict/stickFit'
import { valvePanel } from './verdict/valvePanel'

/** Changes whenever a figure could come out differently; stands beside every stored assessment. */
export const METHOD_VERSION = '2026.4'

export interface AssessOptions {
  /** receives what the likelihood tables look at; for calibration */
  features?: (values: FeatureValues) => void
}

/** Below this the record holds too little to look for patterns. */
const LEAST_SAMPLES = 64
const LEAST_SETTLINGS = 8
/** Up to so many samples a record is short: single strokes of the valve are looked at, since there may be no rhythm to find. */
const SHORT_SAMPLES = 1500
/** The stretch on which shape and valve are judged. */
const MOST_CYCLES = 90
const MOST_SAMPLES = 4000

/**
 * @param record samples of one loop; those outside the week are ignored
 * @param outages declared outages of the loop's area
 * @throws RangeError on a set-up that contradicts itself, or time stamps that do not ascend
 */
export function assessLoopWeek(record: LoopRecord, setup: LoopSetup, week: WeekFrame, outages: TimeSpan[], options: AssessOptions = {}): LoopWeekAssessment {
  if (!(setup.settlingS > 0)) throw new RangeError(`settlingS must be above 0, got ${setup.settlingS}`)
  if (!(setup.tolerance > 0)) throw new RangeError(`tolerance must be above 0, got ${setup.tolerance}`)
  const prepared = prepareRecord(record, setup, week)
  const { n, flags, intervalS } = prepared
  const pvSpan = setup.pvHigh - setup.pvLow
  const opSpan = setup.opHigh - setup.opLow
  const edges = week.hourEdges
  const explain = new Explainer(n > 0
    ? { fromMs: prepared.t[0], toMs: prepared.t[n - 1] + (intervalS > 0 ? intervalS * 1000 : 0) }
    : { fromMs: edges[0], toMs: edges[edges.length - 1] })

  const step = n > 1 ? quantisationStep(middleOf(prepared.pv)) : { step: 0, factor: NaN }
  if (n > 1) for (const s of frozenSpans(prepared.t, prepared.pv, prepared.op, prepared.sp, { horizonS: setup.settlingS, opSpan })) for (let i = s.from; i < s.to; i++) flags[i] |= FROZEN
  const compression = explainQuality(explain, prepared, step)
  // on a thinned record an unchanged value may be the historian's, not the sensor's
  if (compression) for (let i = 0; i < n; i++) flags[i] &= ~FROZEN
  const usableS = explainTime(explain, prepared, setup, edges)
  explainError(explain, prepared, setup)

  const reading = readingCharacter(prepared, pvSpan, step.step)
  const noise = Number.isFinite(reading.noise) ? reading.noise : 0
  const activity = setpointActivity(prepared.sp, pvSpan)
  const series = n > 1 ? analysisSeries(prepared, setup.settlingS) : null
  const enough = series !== null && series.used >= LEAST_SAMPLES
  const tooFew = 'Too few samples in a normal mode and away from the limits.'
  const meaningful = setup.form === 'onOff' ? setup.tolerance : setup.tolerance / 2
  const hunting = enough ? findHunting(prepared, series, setup, meaningful, noise) : null
  const oscillations = hunting?.oscillations ?? []
  const pattern = hunting?.pattern ?? null
  const counted = oscillations.filter(o => o.amplitude >= meaningful).flatMap(o => o.episodes)
  const ledger = buildLedger(prepared, setup.tolerance, week, counted, outages)
  explainOscillation(explain, oscillations[0], hunting?.series ?? null, setup.tolerance, counted, usableS, enough ? 'No regular oscillation was found.' : tooFew)

  // the stretch on which shape and valve are judged: an episode inside one segment, else the longest segment
  const home = hunting?.series ?? null
  const whole = home && (pattern ? longestEpisode(home, pattern) ?? longestSegment(home) : longestSegment(home))
  const stretch = whole && middleOfStretch(whole, pattern ? Math.ceil(MOST_CYCLES * pattern.periodS / home!.intervalS) : MOST_SAMPLES)
  const y = home && stretch ? home.error.slice(stretch.begin, stretch.end) : null
  // minus the error is PV without what the set point does
  if (y) for (let i = 0; i < y.length; i++) y[i] = -y[i]
  const u = home?.op && stretch ? home.op.subarray(stretch.begin, stretch.end) : null
  const period = pattern && home ? pattern.periodS / home.intervalS : null
  const character = enough ? errorCharacter(series) : null
  const tooSlow = swingTooFast(prepared, home, period)
  const panelSilent = setup.form === 'onOff' ? 'The valve tests are not for on-off loops.' : compression ?? tooSlow
  const declared = setup.action === 'reverse' ? 1 : -1
  // PV rises with OP where the controller is reverse acting
  const processSign = home && stretch && u ? controllerSign(home.error.subarray(stretch.begin, stretch.end), u, declared) : declared
  const stick = y && u && character && !panelSilent ? stickFit(y, u, processSign, (3 * (pattern?.periodS ?? 2 * character.staySideS)) / home!.intervalS) : null
  const slip = y && u && home && stretch && !panelSilent ? slipEvents(y, home.pv.subarray(stretch.begin, stretch.end), u, processSign, noise / Math.sqrt(home.factor)) : null
  const stands = u && home && !panelSilent && prepared.n <= SHORT_SAMPLES ? standsIn(home, longestSegment(home)!, setup, processSign, noise / Math.sqrt(home.factor), step.step) : null
  const panel = valvePanel(y, u, period, setup.type, opSpan, stick, slip, stands, panelSilent)
  const shape = y && period !== null && period >= 4 && y.length >= 6 * period ? cycleShape(y, u, period) : null
  const halves = enough && character && character.deviation > 0 ? halfCycles(series, 0.7 * character.deviation) : null
  const upsets = enough ? recoveries(series, setup.settlingS, noise / Math.sqrt(series.factor), processSign, pvSpan) : null
  const responses = explainResponses(explain, enough ? series : null, setup, activity.kind, noise, upsets)
  const benchmarkByHorizon = explainBenchmark(explain, series, setup, compression)

  const features = gatherFeatures({ setup, prepared, series, ledger, oscillations: pattern ? [pattern, ...oscillations.slice(1)] : [], shape, error: character, reading, stick, slip, stands, halves, panel, upsets })
  options.features?.(features)
  const tooShort = !enough ? 'Too few samples in a normal mode and away from the limits to look for a pattern.'
    : !pattern && series.used * series.intervalS < LEAST_SETTLINGS * setup.settlingS
      ? `The record holds only ${(series.used * series.intervalS / setup.settlingS).toPrecision(2)} settling horizons in a normal mode; ${LEAST_SETTLINGS} are needed to judge it.`
      : null
  const judged = judge({ setup, prepared, ledger, features, oscillations, meaningful, compression, tooSlow, tooShort, timeInTolerance: explain.measures.timeInTolerance })
  if (isInsufficient(panel.stiction)) explain.withholdAll(['apparentStiction', 'apparentStictionLow', 'apparentStictionHigh'], sentence(panel.stiction.reason))
  else if (judged.valveLikely) {
    const p = { opSpan, periodS: pattern?.periodS ?? null }
    explain.set('apparentStiction', panel.stiction.percent, y!.length, p, { cycles: panel.stiction.cycles })
    explain.set('apparentStictionLow', panel.stiction.low, y!.length, p, { cycles: panel.stiction.cycles })
    explain.set('apparentStictionHigh', panel.stiction.high, y!.length, p, { cycles: panel.stiction.cycles })
  }
  else explain.withholdAll(['apparentStiction', 'apparentStictionLow', 'apparentStictionHigh'], 'There are no clear signs of sticking, and on a sound valve the width of the PV-OP loop says nothing.')
  explainOnOff(explain, prepared, setup)

  const { valveLikely: _, ...judgement } = judged
  return {
    week: week.id,
    methodVersion: METHOD_VERSION,
    ribbon: ledger.ribbon,
    hours: ledger.hours,
    lostHours: ledger.lostHours,
    measures: explain.measures,
    withheld: explain.withheld,
    explanations: explain.explanations,
    ...judgement,
    oscillations,
    responses,
    valveTests: panel.tests,
    rhythm: home ? rhythmOf(home, setup.settlingS, pattern?.periodS) : null,
    pvOp: home && stretch && (pattern || judged.valveLikely) ? pvOpOf(home, stretch.begin, stretch.end, pattern?.periodS ?? null) : null,
    benchmarkByHorizon,
    model: null,
  }
}

/** Coverage, service factor, limits, frozen and out-of-range shares, travel. @returns usable time, s */
function explainTime(explain: Explainer, prepared: PreparedRecord, setup: LoopSetup, edges: Float64Array): number {
  const { n, flags, intervalS, pv, op } = prepared
  const c = { received: 0, usable: 0, known: 0, offNormal: 0, low: 0, high: 0, op: 0, frozen: 0 }
  for (let i = 0; i < n; i++) {
    const f = flags[i]
    if (f & RECEIVED) c.received++
    if (pv[i] === pv[i]) c.usable++
    if (f & MODE_KNOWN) c.known++
    if (f & OFF_NORMAL) c.offNormal++
    if (f & AT_LOW) c.low++
    if (f & AT_HIGH) c.high++
    if (f & FROZEN) c.frozen++
    if (op && op[i] === op[i]) c.op++
  }
  const weekMs = edges[edges.length - 1] - edges[0]
  const usableS = n > 0 && intervalS > 0 ? c.usable * intervalS : 0
  const p = { nativeIntervalS: intervalS }
  explain.set('coverage', Math.min(1, (usableS * 1000) / weekMs), c.usable, { ...p, weekHours: weekMs / 3_600_000 }, { usableSamples: c.usable, longGaps: prepared.longGaps, missingSlots: prepared.missingSlots })
  explain.set('frozenFraction', c.frozen / c.received, c.received, { horizonS: setup.settlingS, opShare: 0.02 }, { frozenSamples: c.frozen })
  explain.set('outOfRangeFraction', prepared.outOfRange / c.received, c.received, { pvLow: setup.pvLow, pvHigh: setup.pvHigh, marginFraction: 0.05 }, { samplesOutOfRange: prepared.outOfRange })
  if (prepared.hasMode)
    explain.set('serviceFactor', 1 - c.offNormal / c.known, c.known, { ...p, normalModes: setup.normalModes.join(' ') }, { knownSamples: c.known, normalSamples: c.known - c.offNormal })
  else explain.withhold('serviceFactor', 'The record has no MODE, so the time in the normal mode is not known.')

  const limits = ['saturationFraction', 'saturationLowFraction', 'saturationHighFraction'] as const
  if (!op) {
    explain.withholdAll([...limits, 'valveTravelPerDay', 'reversalsPerDay'], 'The record has no OP.')
    return usableS
  }
  const opSpan = setup.opHigh - setup.opLow
  if (setup.form === 'onOff') explain.withholdAll([...limits], 'An on-off output is always at one of its limits.')
  else {
    const l = { ...p, opLow: setup.opLow, opHigh: setup.opHigh, marginPercent: 0.5, leastSamples: 3 }
    explain.set('saturationFraction', (c.low + c.high) / c.op, c.op, l, { samplesAtLimits: c.low + c.high })
    explain.set('saturationLowFraction', c.low / c.op, c.op, l, { samplesAtLow: c.low })
    explain.set('saturationHighFraction', c.high / c.op, c.op, l, { samplesAtHigh: c.high })
  }
  const m = valveMovement(op, prepared.stretches, intervalS, opSpan)
  const days = (m.samples * intervalS) / 86_400
  explain.set('valveTravelPerDay', m.travelPerDay, m.samples, { ...p, opSpan }, { days, travelPercent: m.travelPerDay * days })
  explain.set('reversalsPerDay', m.reversalsPerDay, m.samples, { ...p, opSpan }, { days, noiseBand: m.noiseBand, reversals: Math.round(m.reversalsPerDay * days) })
  if (setup.form === 'onOff') explain.set('switchingsPerDay', m.switchingsPerDay, m.samples, { ...p, opSpan }, {})
  return usableS
}

function explainError(explain: Explainer, prepared: PreparedRecord, setup: LoopSetup): void {
  const e = errorMeasures(prepared, setup.tolerance)
  const pvSpan = setup.pvHigh - setup.pvLow
  const p = { nativeIntervalS: prepared.intervalS }
  const none = prepared.sp ? 'No sample has both SP and PV in a normal mode.' : 'The record has no SP, so there is no control error.'
  const hours = (e.errorSamples * prepared.intervalS) / 3600
  explain.set('iaePerHour', e.meanAbsoluteError, e.errorSamples, p, { hours, integralUnitHours: e.meanAbsoluteError * hours }, none)
  explain.set('iaePercentSpan', (100 * e.meanAbsoluteError) / pvSpan, e.errorSamples, { ...p, pvSpan }, { iaePerHour: e.meanAbsoluteError }, none)
  explain.set('offset', e.offset, e.errorSamples, p, { hours, signedIntegralUnitHours: e.offset * hours }, none)
  explain.set('standardDeviation', e.standardDeviation, e.pvSamples, p, { meanPv: e.pvMean }, 'No sample of PV in a normal mode.')
  explain.set('timeInTolerance', e.timeInTolerance, e.anySamples, { ...p, tolerance: setup.tolerance }, { samplesWithin: Math.round(e.timeInTolerance * e.anySamples) }, none)
}

function explainOscillation(explain: Explainer, o: Oscillation | undefined, series: AnalysisSeries | null, tolerance: number, counted: TimeSpan[], usableS: number, none: string): void {
  const keys = ['oscillationIndex', 'oscillationPeriod', 'oscillationAmplitude', 'oscillationStrength'] as const
  if (!series) return explain.withholdAll([...keys, 'oscillationShare'], none)
  const p = { analysisIntervalS: series.intervalS, tolerance }
  const huntingS = mergeSpans(counted).reduce((sum, e) => sum + e.toMs - e.fromMs, 0) / 1000
  explain.set('oscillationShare', Math.min(1, huntingS / usableS), series.used, p, { huntingS, usableS })
  if (!o) return explain.withholdAll([...keys], none)
  explain.set('oscillationIndex', o.regularity, series.used, p, { decayRatio: o.decay, episodes: o.episodes.length })
  explain.set('oscillationPeriod', o.periodS, series.used, p, { standardErrorS: o.periodSdS })
  explain.set('oscillationAmplitude', o.amplitude, series.used, p, { countsFrom: tolerance / 2 })
  explain.set('oscillationStrength', o.strength, series.used, p, { oscillatingS: o.episodes.reduce((sum, e) => sum + e.toMs - e.fromMs, 0) / 1000 })
}

function explainOnOff(explain: Explainer, prepared: PreparedRecord, setup: LoopSetup): void {
  const keys = ['onOffPeriodS', 'onOffSwing', 'onOffDuty'] as const
  if (setup.form !== 'onOff') return explain.withholdAll([...keys, 'switchingsPerDay'], 'Only for on-off loops.')
  if (!prepared.op) return explain.withholdAll([...keys, 'switchingsPerDay'], 'The record has no OP.')
  const c = onOffCycle(prepared.op, prepared.pv, prepared.stretches, prepared.intervalS, (setup.opLow + setup.opHigh) / 2)
  if (!c) return explain.withholdAll([...keys], 'Fewer than three whole switching cycles.')
  const p = { nativeIntervalS: prepared.intervalS, hysteresis: setup.hysteresis }
  explain.set('onOffPeriodS', c.periodS, c.cycles, p, { cycles: c.cycles })
  explain.set('onOffSwing', c.swing, c.cycles, p, { cycles: c.cycles })
  explain.set('onOffDuty', c.duty, c.cycles, p, { cycles: c.cycles })
}

interface Stretch { begin: number, end: number }

/** Stands before jumps of PV; of its slope on level loops, which mostly integrate. */
function standsIn(series: AnalysisSeries, { begin, end }: Stretch, setup: LoopSetup, sign: 1 | -1, noise: number, quantum: number): { found: StandsAndJumps, bends: boolean, runs: StickRuns | null } {
  const bends = setup.type === 'level'
  const width = Math.min(12, Math.max(2, Math.round(setup.settlingS / (bends ? 7.5 : 40) / series.intervalS)))
  const found = standsAndJumps(series.pv.subarray(begin, end), series.op!.subarray(begin, end), series.sp && series.sp.subarray(begin, end),
    { sign, noise, quantum, pvSpan: setup.pvHigh - setup.pvLow, opSpan: setup.opHigh - setup.opLow, width, bends })
  return { found, bends, runs: bends ? stickRuns(series.pv.subarray(begin, end), series.op!.subarray(begin, end), sign) : null }
}

function longestSegment(series: AnalysisSeries): Stretch | null {
  return series.segments.reduce<Stretch | null>((a, b) => (a && a.end - a.begin >= b.end - b.begin ? a : b), null)
}

/** At most `most` samples from the middle: more cycles add cost, hardly knowledge. */
function middleOfStretch(s: Stretch, most: number): Stretch {
  const length = Math.min(s.end - s.begin, Math.max(64, Math.min(most, MOST_SAMPLES)))
  const begin = s.begin + ((s.end - s.begin - length) >> 1)
  return { begin, end: begin + length }
}

/** The longest piece of an episode inside one segment; null below six periods. */
function longestEpisode(series: AnalysisSeries, o: Oscillation): Stretch | null {
  let best: Stretch | null = null
  for (const [from, to] of spansOf(series, o)) {
    for (const s of series.segments) {
      const begin = Math.max(from, s.begin)
      const end = Math.min(to, s.end)
      if (!best || end - begin > best.end - best.begin) best = { begin, end }
    }
  }
  return best && best.end - best.begin >= (6 * o.periodS) / series.intervalS ? best : null
}

/** Why a cause cannot be read from the record's sampling, or null. */
function swingTooFast(prepared: PreparedRecord, series: AnalysisSeries | null, period: number | null): string | null {
  const say = (samples: number) => `The loop swings about every ${samples.toFixed(1)} samples; at least 8 samples a cycle are needed to see why. Record it at a shorter interval.`
  if (!series) return null
  if (period !== null) return period < 8 && series.factor === 1 ? say(period) : null
  const piece = nativePiece(prepared)
  const fast = piece ? fastSwing(piece) : null
  return fast && fast.share > 0.33 ? say(fast.period) : null
}

/** The first piece of up to 4096 native samples in normal mode with nothing missing, 512 at least. */
function nativePiece(prepared: PreparedRecord): Float64Array | null {
  const x = prepared.error ?? prepared.pv
  let run = 0
  for (let i = 0; i <= prepared.n; i++) {
    if (i < prepared.n && x[i] === x[i] && (prepared.flags[i] & (OFF_NORMAL | AT_LOW | AT_HIGH | FROZEN)) === 0 && run < 4096) run++
    else {
      if (run >= 512) return x.subarray(i - run, i)
      run = 0
    }
  }
  return null
}
