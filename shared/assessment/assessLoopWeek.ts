/**
 * Assesses one loop over one ISO week: measures, ledger, oscillations, benchmark, valve tests, verdict, and how each figure was made.
 * Pure; its arguments are left alone. About 10 to 40 ms for a week at 10 s.
 */
import { findHunting } from './verdict/findHunting'
import { frozenSpans } from './quality/frozenSpans'
import { quantisationStep } from './quality/quantisationStep'
import { compressionFactor } from './quality/compressionFactor'
import { varianceBenchmark } from './benchmark/varianceBenchmark'
import { ratioByHorizon } from './benchmark/ratioByHorizon'
import { delaySamples } from './benchmark/delaySamples'
import { autocorrelation } from './statistics/autocorrelation'
import { welchSpectrum } from './spectrum/welchSpectrum'
import { buildLedger, mergeSpans } from './ledger/buildLedger'
import { errorMeasures } from './error/errorMeasures'
import { valveMovement } from './error/valveMovement'
import { analysisSeries, type AnalysisSeries } from './preparation/analysisSeries'
import { AT_HIGH, AT_LOW, FROZEN, MODE_KNOWN, OFF_NORMAL, prepareRecord, RECEIVED } from './preparation/prepareRecord'
import { setpointActivity } from './preparation/setpointActivity'
import { Explainer } from './explanation/Explainer'
import { cycleShape, type CycleShape } from './verdict/cycleShape'
import { errorCharacter } from './verdict/errorCharacter'
import { gatherFeatures, spansOf, type FeatureValues } from './verdict/gatherFeatures'
import { judge } from './verdict/judge'
import { readingCharacter } from './verdict/readingCharacter'
import { isInsufficient, type LoopRecord, type LoopSetup, type LoopWeekAssessment, type Oscillation, type TimeSpan, type WeekFrame } from './types'

/** Changes whenever a figure could come out differently; stands beside every stored assessment. */
export const METHOD_VERSION = '2026.1'

const QUALITY_SAMPLES = 20_000
const BENCHMARK_SAMPLES = 20_000
const COMPRESSION_LIMIT = 3

export interface AssessOptions {
  /** receives what the likelihood tables look at; for calibration */
  features?: (values: FeatureValues) => void
}

/**
 * @param record samples of one loop; those outside the week are ignored
 * @param outages declared outages of the loop's area
 * @throws RangeError on a set-up that contradicts itself, or time stamps that do not ascend
 */
export function assessLoopWeek(record: LoopRecord, setup: LoopSetup, week: WeekFrame, outages: TimeSpan[], options: AssessOptions = {}): LoopWeekAssessment {
  const edges = week.hourEdges
  const weekMs = edges[edges.length - 1] - edges[0]
  const prepared = prepareRecord(record, setup, week)
  const { n, flags, intervalS } = prepared
  const pvSpan = setup.pvHigh - setup.pvLow
  const opSpan = setup.opHigh - setup.opLow
  const window: TimeSpan = n > 0
    ? { fromMs: prepared.t[0], toMs: prepared.t[n - 1] + (intervalS > 0 ? intervalS * 1000 : 0) }
    : { fromMs: edges[0], toMs: edges[edges.length - 1] }
  const explain = new Explainer(window)
  const step = n > 1 ? quantisationStep(middleOf(prepared.pv)) : { step: 0, factor: NaN }
  if (n > 1) for (const s of frozenSpans(prepared.t, prepared.pv, prepared.op, prepared.sp, { horizonS: setup.settlingS, opSpan })) for (let i = s.from; i < s.to; i++) flags[i] |= FROZEN

  const count = countFlags(flags, prepared.pv, prepared.op)
  const usableS = count.usable * intervalS
  explain.set('coverage', n > 0 ? Math.min(1, (usableS * 1000) / weekMs) : 0, count.usable, { nativeIntervalS: intervalS, weekHours: weekMs / 3_600_000 }, { usableSamples: count.usable, longGaps: prepared.longGaps, missingSlots: prepared.missingSlots }, 'No samples in this week.')
  if (explain.measures.coverage === null) explain.measures.coverage = 0
  const parameters = { nativeIntervalS: intervalS }

  if (prepared.hasMode)
    explain.set('serviceFactor', count.known > 0 ? 1 - count.offNormal / count.known : NaN, count.known, { ...parameters, normalModes: setup.normalModes.join(' ') }, { knownSamples: count.known, normalSamples: count.known - count.offNormal })
  else explain.withhold('serviceFactor', 'The record has no MODE, so time in the normal mode is not known.')

  const saturation = ['saturationFraction', 'saturationLowFraction', 'saturationHighFraction'] as const
  if (!prepared.op) explain.withholdAll([...saturation, 'valveTravelPerDay', 'reversalsPerDay'], 'The record has no OP.')
  else {
    if (setup.form === 'onOff') explain.withholdAll([...saturation], 'An on-off output is always at one of its limits.')
    else {
      const limits = { ...parameters, opLow: setup.opLow, opHigh: setup.opHigh, marginPercent: 0.5, leastSamples: 3 }
      explain.set('saturationFraction', (count.low + count.high) / count.op, count.op, limits, { samplesAtLimits: count.low + count.high })
      explain.set('saturationLowFraction', count.low / count.op, count.op, limits, { samplesAtLow: count.low })
      explain.set('saturationHighFraction', count.high / count.op, count.op, limits, { samplesAtHigh: count.high })
    }
    const m = valveMovement(prepared.op, prepared.stretches, intervalS, opSpan)
    explain.set('valveTravelPerDay', m.travelPerDay, m.samples, { ...parameters, opSpan }, {})
    explain.set('reversalsPerDay', m.reversalsPerDay, m.samples, { ...parameters, opSpan }, { noiseBand: m.noiseBand })
    if (setup.form === 'onOff') explain.set('switchingsPerDay', m.switchingsPerDay, m.samples, { ...parameters, opSpan }, {})
  }

  const compression = compressionOf(explain, prepared.pv, step)
  explain.set('frozenFraction', count.frozen / count.received, count.received, { horizonS: setup.settlingS, opShare: 0.02 }, { frozenSamples: count.frozen })
  explain.set('outOfRangeFraction', prepared.outOfRange / count.received, count.received, { pvLow: setup.pvLow, pvHigh: setup.pvHigh, marginFraction: 0.05 }, { samplesOutOfRange: prepared.outOfRange })

  const error = errorMeasures(prepared, setup.tolerance)
  const noError = prepared.sp ? 'No sample has both SP and PV in a normal mode.' : 'The record has no SP, so there is no control error.'
  explain.set('iaePerHour', error.meanAbsoluteError, error.errorSamples, parameters, {}, noError)
  explain.set('iaePercentSpan', (100 * error.meanAbsoluteError) / pvSpan, error.errorSamples, { ...parameters, pvSpan }, { iaePerHour: error.meanAbsoluteError }, noError)
  explain.set('offset', error.offset, error.errorSamples, parameters, {}, noError)
  explain.set('standardDeviation', error.standardDeviation, error.pvSamples, parameters, { meanPv: error.pvMean })
  explain.set('timeInTolerance', error.timeInTolerance, error.anySamples, { ...parameters, tolerance: setup.tolerance }, {}, noError)

  const reading = readingCharacter(prepared, pvSpan, step.step)
  const activity = setpointActivity(prepared.sp, pvSpan)
  const series = n > 1 ? analysisSeries(prepared, setup.settlingS) : null
  const hunting = series && series.used >= 64
    ? findHunting(prepared, series, setup, setup.form === 'onOff' ? setup.tolerance : setup.tolerance / 2, Number.isFinite(reading.noise) ? reading.noise : 0)
    : null
  const oscillations = hunting?.oscillations ?? []
  const strongest = oscillations[0]
  const ledger = buildLedger(prepared, setup.tolerance, week, oscillations.flatMap(o => o.episodes), outages)
  const oscillating = ['oscillationIndex', 'oscillationPeriod', 'oscillationAmplitude', 'oscillationStrength'] as const
  if (strongest && series && hunting) {
    const huntingS = mergeSpans(oscillations.flatMap(o => o.episodes)).reduce((sum, e) => sum + e.toMs - e.fromMs, 0) / 1000
    const p = { analysisIntervalS: hunting.series.intervalS, tolerance: setup.tolerance }
    explain.set('oscillationIndex', strongest.regularity, series.used, p, { decayRatio: strongest.decay, episodes: strongest.episodes.length })
    explain.set('oscillationPeriod', strongest.periodS, series.used, p, { standardErrorS: strongest.periodSdS })
    explain.set('oscillationAmplitude', strongest.amplitude, series.used, p, {})
    explain.set('oscillationStrength', strongest.strength, series.used, p, {})
    explain.set('oscillationShare', Math.min(1, huntingS / usableS), series.used, p, { huntingS, usableS })
  }
  else {
    if (series && series.used >= 64) explain.set('oscillationShare', 0, series.used, { analysisIntervalS: series.intervalS, tolerance: setup.tolerance }, { huntingS: 0, usableS })
    explain.withholdAll([...oscillating, 'oscillationShare'], series && series.used >= 64 ? 'No regular oscillation of meaningful size was found.' : 'Too few samples in a normal mode and away from the limits.')
  }

  const shape = hunting && strongest ? shapeOf(hunting.series, strongest) : null
  const features = gatherFeatures({ setup, prepared, series, ledger, oscillations, shape, error: series ? errorCharacter(series) : null, reading, standardDeviation: error.standardDeviation, valveTests: [] })
  options.features?.(features)
  const benchmarkByHorizon = benchmarkOf(explain, series, setup, compression)
  const judged = judge({ setup, measures: explain.measures, ledger, oscillations, hasSetpoint: activity.kind !== 'absent' })
  return {
    week: week.id,
    methodVersion: METHOD_VERSION,
    ribbon: ledger.ribbon,
    hours: ledger.hours,
    lostHours: ledger.lostHours,
    measures: explain.measures,
    withheld: explain.withheld,
    explanations: explain.explanations,
    ...judged,
    oscillations,
    responses: [],
    valveTests: [],
    rhythm: series ? rhythmOf(series, setup.settlingS, strongest?.periodS) : null,
    pvOp: null,
    benchmarkByHorizon,
    model: null,
  }
}

function countFlags(flags: Uint8Array, pv: Float64Array, op: Float64Array | null) {
  const c = { received: 0, usable: 0, known: 0, offNormal: 0, low: 0, high: 0, op: 0, frozen: 0 }
  for (let i = 0; i < flags.length; i++) {
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
  return c
}

/** @returns why shape, benchmark and valve tests cannot be trusted on this record, or null */
function compressionOf(explain: Explainer, pv: Float64Array, step: { step: number, factor: number }): string | null {
  const piece = middleOf(pv)
  if (step.step > 0) explain.set('quantisation', step.step, piece.length, {}, { stepOverDeviation: step.factor })
  else explain.withhold('quantisation', 'No step can be seen: the values do not lie on a grid.')
  const c = piece.length > 0 ? compressionFactor(piece, step.step) : null
  if (!c || isInsufficient(c)) {
    explain.withhold('compressionFactor', c ? sentence(c.reason) : 'No samples in this week.')
    return null
  }
  explain.set('compressionFactor', c.factor, c.samples, { tolerance: c.tolerance, upperLimit: 3 }, { zeroSecondDifferences: c.zeroSecondDifferences, repeats: c.repeats, repeatFactor: c.repeatFactor })
  if (c.factor > COMPRESSION_LIMIT) return `The historian has thinned the record (compression factor ${c.factor.toFixed(1)}, limit 3), so its shape cannot be trusted.`
  // repeats come from coarse resolution too: only a fine step tells that a value was held
  if (c.repeatFactor > COMPRESSION_LIMIT && step.step > 0 && step.factor < 0.1) return `Most samples repeat the one before (factor ${c.repeatFactor.toFixed(1)}, limit 3): the historian holds old values, so the shape cannot be trusted.`
  return null
}

/** A reason from the numerics, as a sentence. */
function sentence(reason: string): string {
  return `${reason.charAt(0).toUpperCase()}${reason.slice(1)}${reason.endsWith('.') ? '' : '.'}`
}

/** Minimum-variance ratio on the segments of the analysis series. */
function benchmarkOf(explain: Explainer, series: AnalysisSeries | null, setup: LoopSetup, refused: string | null): LoopWeekAssessment['benchmarkByHorizon'] {
  const keys = ['varianceRatio', 'varianceRatioLow', 'varianceRatioHigh', 'headroom'] as const
  const refuse = (reason: string) => {
    explain.withholdAll([...keys], reason)
    return null
  }
  if (refused) return refuse(refused)
  if (!series) return refuse('No samples in this week.')
  if (setup.form === 'onOff') return refuse('On-off control cannot be compared with minimum variance.')
  let left = BENCHMARK_SAMPLES
  const segments: Float64Array[] = []
  for (const s of series.segments) {
    const length = Math.min(left, s.end - s.begin)
    if (length < 60) continue
    segments.push(series.error.subarray(s.begin, s.begin + length))
    left -= length
  }
  // without a dead time: the extended horizon, a sixth of the settling horizon (our default)
  const horizonS = setup.deadTimeS ?? setup.settlingS / 6
  const b = Math.min(60, delaySamples(horizonS, series.intervalS))
  const v = varianceBenchmark(segments, { delaySamples: b, delaySource: setup.deadTimeS === null ? 'horizon' : 'known' })
  if (isInsufficient(v)) return refuse(sentence(v.reason))
  const parameters = { analysisIntervalS: series.intervalS, delaySamples: b, delaySource: v.delaySource, horizonS }
  const intermediates = { minimumVariance: v.minimumVariance, variance: v.variance, asymptoticDeviation: v.standardDeviation, segments: v.segments.length, modelOrder: v.segments[0]?.order ?? null }
  explain.set('varianceRatio', v.ratio, v.samples, parameters, intermediates)
  explain.set('headroom', v.headroom, v.samples, parameters, intermediates)
  if (v.low !== null && v.high !== null) {
    explain.set('varianceRatioLow', v.low, v.samples, parameters, intermediates)
    explain.set('varianceRatioHigh', v.high, v.samples, parameters, intermediates)
  }
  else explain.withholdAll(['varianceRatioLow', 'varianceRatioHigh'], sentence(v.intervalWithheld ?? 'No interval.'))
  const curve = ratioByHorizon(segments, { longestSamples: Math.max(30, 2 * b) })
  if (isInsufficient(curve)) return null
  return {
    horizonS: Array.from(curve.ratio, (_, i) => (i + 1) * series.intervalS),
    ratio: Array.from(curve.ratio, r => Number(r.toFixed(4))),
  }
}

/** A piece of at most QUALITY_SAMPLES from the middle: resolution and compression do not change within a week. */
function middleOf(x: Float64Array): Float64Array {
  const from = Math.max(0, (x.length - QUALITY_SAMPLES) >> 1)
  return x.subarray(from, from + QUALITY_SAMPLES)
}

/** Cycle by cycle over the longest piece of an episode inside one segment. */
function shapeOf(series: AnalysisSeries, o: Oscillation): CycleShape | null {
  let begin = 0
  let end = 0
  for (const [from, to] of spansOf(series, o)) {
    for (const s of series.segments) {
      const a = Math.max(from, s.begin)
      const b = Math.min(to, s.end)
      if (b - a > end - begin) {
        begin = a
        end = b
      }
    }
  }
  const period = o.periodS / series.intervalS
  if (end - begin < 6 * period) return null
  // minus the error is PV without what the set point does
  const y = series.error.slice(begin, end)
  for (let i = 0; i < y.length; i++) y[i] = -y[i]
  return cycleShape(y, series.op ? series.op.subarray(begin, end) : null, period)
}

/** Autocorrelation and spectrum of the longest segment, thinned for drawing. */
function rhythmOf(series: AnalysisSeries, settlingS: number, periodS?: number): LoopWeekAssessment['rhythm'] {
  const longest = series.segments.reduce<{ begin: number, end: number } | null>((a, b) => (a && a.end - a.begin >= b.end - b.begin ? a : b), null)
  if (!longest || longest.end - longest.begin < 64) return null
  const x = series.error.subarray(longest.begin, longest.end)
  const { intervalS } = series
  const maxLag = Math.max(20, Math.min(x.length >> 1, 4000, Math.ceil(Math.max(10 * settlingS, 8 * (periodS ?? 0)) / intervalS)))
  const acf = autocorrelation(x, maxLag)
  if (!(acf[0] === acf[0])) return null
  const stride = Math.ceil((maxLag + 1) / 400)
  const lagS: number[] = []
  const correlation: number[] = []
  for (let k = 0; k <= maxLag; k += stride) {
    lagS.push(k * intervalS)
    correlation.push(Number(acf[k].toFixed(4)))
  }
  const most = periodS ? 12 * Math.max(periodS, 4 * intervalS) / intervalS : 1024
  let length = 64
  while (length * 2 <= x.length && length < most && length < 8192) length *= 2
  const spectrum = welchSpectrum(x, { sampleIntervalS: intervalS, segmentLength: length })
  const bins = spectrum.power.length - 1
  const group = Math.ceil(bins / 400)
  const periods: number[] = []
  const power: number[] = []
  for (let k = 1; k <= bins; k += group) {
    let best = k
    for (let j = k; j < k + group && j <= bins; j++) if (spectrum.power[j] > spectrum.power[best]) best = j
    periods.push(Number((1 / spectrum.frequencyHz[best]).toPrecision(5)))
    power.push(Number(spectrum.power[best].toPrecision(4)))
  }
  return { lagS, autocorrelation: correlation, periodS: periods, power }
}
