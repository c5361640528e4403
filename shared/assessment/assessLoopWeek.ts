/**
 * Assesses one loop over one ISO week: measures, ledger, oscillations, benchmark, valve tests, verdict, and how each figure was made.
 * Pure; its arguments are left alone. About 10 to 40 ms for a week at 10 s.
 */
import { detectOscillations } from './oscillation/detectOscillations'
import { autocorrelation } from './statistics/autocorrelation'
import { welchSpectrum } from './spectrum/welchSpectrum'
import { buildLedger } from './ledger/buildLedger'
import { errorMeasures } from './error/errorMeasures'
import { valveMovement } from './error/valveMovement'
import { analysisSeries, type AnalysisSeries } from './preparation/analysisSeries'
import { AT_HIGH, AT_LOW, FROZEN, MODE_KNOWN, OFF_NORMAL, prepareRecord, RECEIVED } from './preparation/prepareRecord'
import { setpointActivity } from './preparation/setpointActivity'
import { Explainer } from './explanation/Explainer'
import { judge } from './verdict/judge'
import type { LoopRecord, LoopSetup, LoopWeekAssessment, TimeSpan, WeekFrame } from './types'

/** Changes whenever a figure could come out differently; stands beside every stored assessment. */
export const METHOD_VERSION = '2026.1'

/**
 * @param record samples of one loop; those outside the week are ignored
 * @param outages declared outages of the loop's area
 * @throws RangeError on a set-up that contradicts itself, or time stamps that do not ascend
 */
export function assessLoopWeek(record: LoopRecord, setup: LoopSetup, week: WeekFrame, outages: TimeSpan[]): LoopWeekAssessment {
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

  const error = errorMeasures(prepared, setup.tolerance)
  const noError = prepared.sp ? 'No sample has both SP and PV in a normal mode.' : 'The record has no SP, so there is no control error.'
  explain.set('iaePerHour', error.meanAbsoluteError, error.errorSamples, parameters, {}, noError)
  explain.set('iaePercentSpan', (100 * error.meanAbsoluteError) / pvSpan, error.errorSamples, { ...parameters, pvSpan }, { iaePerHour: error.meanAbsoluteError }, noError)
  explain.set('offset', error.offset, error.errorSamples, parameters, {}, noError)
  explain.set('standardDeviation', error.standardDeviation, error.pvSamples, parameters, { meanPv: error.pvMean })
  explain.set('timeInTolerance', error.timeInTolerance, error.anySamples, { ...parameters, tolerance: setup.tolerance }, {}, noError)

  const activity = setpointActivity(prepared.sp, pvSpan)
  const series = n > 1 ? analysisSeries(prepared, setup.settlingS) : null
  const oscillations = series && series.used >= 64
    ? detectOscillations(series.error, { sampleIntervalS: series.intervalS, minimumAmplitude: setup.form === 'onOff' ? setup.tolerance : setup.tolerance / 2, longestPeriodS: Math.max(14_400, 4 * setup.settlingS) })
    : []
  if (series) timesOf(oscillations, series)
  const strongest = oscillations[0]
  const ledger = buildLedger(prepared, setup.tolerance, week, oscillations.flatMap(o => o.episodes), outages)
  const oscillating = ['oscillationIndex', 'oscillationPeriod', 'oscillationAmplitude', 'oscillationStrength'] as const
  if (strongest && series) {
    const p = { analysisIntervalS: series.intervalS, tolerance: setup.tolerance }
    explain.set('oscillationIndex', strongest.regularity, series.used, p, { decayRatio: strongest.decay, episodes: strongest.episodes.length })
    explain.set('oscillationPeriod', strongest.periodS, series.used, p, { standardErrorS: strongest.periodSdS })
    explain.set('oscillationAmplitude', strongest.amplitude, series.used, p, {})
    explain.set('oscillationStrength', strongest.strength, series.used, p, {})
  }
  else explain.withholdAll([...oscillating], series && series.used >= 64 ? 'No regular oscillation of meaningful size was found.' : 'Too few samples in a normal mode and away from the limits.')

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
    benchmarkByHorizon: null,
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

/** The detector counts blocks from 0; long gaps and clock changes are put back from the series' own stamps. */
function timesOf(oscillations: ReturnType<typeof detectOscillations>, series: AnalysisSeries): void {
  const blockMs = series.intervalS * 1000
  const last = series.t.length - 1
  const back = (ms: number) => {
    const at = ms / blockMs
    const i = Math.min(last, Math.max(0, Math.floor(at)))
    return series.t[i] + (at - i) * blockMs
  }
  for (const o of oscillations) o.episodes = o.episodes.map(e => ({ fromMs: back(e.fromMs), toMs: back(e.toMs) }))
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
