/**
 * When and how the loop hunts: regular oscillations on the analysis series, on the native record where averaging would hide a
 * quicker one, and, where neither shows, runs of uneven but alike half-cycles.
 *
 * Source: detectOscillations, halfCycles. The native record is searched when averaging down takes more than 15 % of the error's variance.
 */
import type { LoopSetup, Oscillation } from '../types'
import { detectOscillations } from '../oscillation/detectOscillations'
import { regularity } from '../oscillation/regularity'
import { decayRatio } from '../oscillation/decayRatio'
import { autocorrelation } from '../statistics/autocorrelation'
import { analysisSeries, type AnalysisSeries } from '../preparation/analysisSeries'
import type { PreparedRecord } from '../preparation/prepareRecord'
import { halfCycles, type HalfCycles } from './halfCycles'

export interface Hunting {
  /** what is reported; the strongest first */
  oscillations: Oscillation[]
  /** what cause and valve are judged on: the strongest, or an uneven swing too small to be reported */
  pattern: Oscillation | null
  /** the series on which the pattern was found: its samples, not the analysis interval's, show its shape */
  series: AnalysisSeries
}

const HIDDEN_VARIANCE = 0.15
const SMALLEST_SHARE = 0.2
/** Runs of alike half-cycles that are too few or too small a share come about by chance (up to 0.45 on simulated sound loops). */
const ENOUGH_RUNS = [{ halves: 12, share: 0.65 }, { halves: 24, share: 0.5 }]

/**
 * @param meaningful amplitude from which an oscillation costs hours, PV unit; smaller ones down to a fifth of it are
 *   still found, since they may betray a fault, but do not count as hunting
 * @param noise standard deviation of PV's noise, native samples
 */
export function findHunting(prepared: PreparedRecord, series: AnalysisSeries, setup: LoopSetup, meaningful: number, noise: number): Hunting {
  const minimumAmplitude = SMALLEST_SHARE * meaningful
  const longestPeriodS = Math.max(14_400, 4 * setup.settlingS)
  const find = (s: AnalysisSeries, noiseLevel: number, longest: number) => {
    const found = detectOscillations(s.error, { sampleIntervalS: s.intervalS, minimumAmplitude, noiseLevel, longestPeriodS: longest })
    stampTimes(found, s)
    return found
  }
  let oscillations = find(series, noise / Math.sqrt(series.factor), longestPeriodS)
  let home = series
  if (series.factor > 1 && hiddenShare(prepared, series) > HIDDEN_VARIANCE) {
    const fine = analysisSeries(prepared, setup.settlingS, { factor: 1 })
    const quick = find(fine, noise, 8 * series.intervalS)
    if (quick.length > 0 && (!oscillations.length || quick[0].strength > oscillations[0].strength)) {
      home = fine
      oscillations = [...quick, ...oscillations.filter(o => o.periodS > 8 * series.intervalS)]
    }
  }
  let pattern = oscillations[0] ?? null
  if (!pattern) {
    const least = Math.max(minimumAmplitude, 3 * noise / Math.sqrt(series.factor), 0.7 * deviationOf(series))
    const h = least > 0 ? halfCycles(series, least) : NO_HALF_CYCLES
    if (ENOUGH_RUNS.some(e => h.inRuns >= e.halves && h.inRuns >= e.share * h.count) && h.periodS >= 8 * series.intervalS && h.periodS <= longestPeriodS) {
      pattern = asOscillation(h, series)
      if (h.amplitude >= meaningful) oscillations = [pattern]
    }
  }
  // a cycle is read on at least 16 samples where the record has them
  if (pattern && home.factor > 1 && pattern.periodS < 16 * home.intervalS)
    home = analysisSeries(prepared, setup.settlingS, { factor: Math.max(1, Math.floor(pattern.periodS / 16 / prepared.intervalS)) })
  return { oscillations, pattern, series: home }
}

const NO_HALF_CYCLES: HalfCycles = { count: 0, inRuns: 0, lengthVariation: NaN, peakVariation: NaN, periodS: NaN, amplitude: NaN, runs: [] }

function deviationOf(series: AnalysisSeries): number {
  let mean = 0
  let square = 0
  for (const s of series.segments) for (let i = s.begin; i < s.end; i++) mean += series.error[i] / series.used
  for (const s of series.segments) for (let i = s.begin; i < s.end; i++) square += (series.error[i] - mean) ** 2
  return Math.sqrt(square / series.used)
}

/** Share of the error's variance that averaging down has taken away. */
function hiddenShare(prepared: PreparedRecord, series: AnalysisSeries): number {
  const source = prepared.error ?? prepared.pv
  let mean = 0
  let count = 0
  for (let i = 0; i < source.length; i++) if (source[i] === source[i]) { mean += source[i]; count++ }
  mean /= count
  let whole = 0
  for (let i = 0; i < source.length; i++) if (source[i] === source[i]) whole += (source[i] - mean) ** 2
  whole /= count
  let blocks = 0
  let blockMean = 0
  for (const s of series.segments) for (let i = s.begin; i < s.end; i++) { blockMean += series.error[i]; blocks++ }
  blockMean /= blocks
  let rest = 0
  for (const s of series.segments) for (let i = s.begin; i < s.end; i++) rest += (series.error[i] - blockMean) ** 2
  return whole > 0 && blocks > 0 ? 1 - rest / blocks / whole : 0
}

function asOscillation(h: HalfCycles, series: AnalysisSeries): Oscillation {
  const longest = series.segments.reduce((a, b) => (a.end - a.begin >= b.end - b.begin ? a : b))
  const x = series.error.subarray(longest.begin, longest.end)
  const lags = Math.min(x.length - 1, Math.ceil((7 * h.periodS) / series.intervalS))
  const acf = autocorrelation(x, lags)
  const r = regularity(acf).regularity
  const decay = decayRatio(acf)
  let square = 0
  for (let i = 0; i < x.length; i++) square += x[i] * x[i]
  return {
    periodS: h.periodS,
    periodSdS: (h.lengthVariation * h.periodS) / Math.sqrt(h.count),
    amplitude: h.amplitude,
    // by its nature below 1: what the spectrum would call regular has been found before
    regularity: Number.isFinite(r) ? Math.min(r, 1) : 0,
    decay: Number.isFinite(decay) ? decay : 0,
    strength: Math.min(1, (0.5 * h.amplitude * h.amplitude) / (square / x.length)),
    episodes: h.runs,
  }
}

/** The detector counts blocks from 0; the series' own stamps put long gaps back. */
function stampTimes(oscillations: Oscillation[], series: AnalysisSeries): void {
  const blockMs = series.intervalS * 1000
  const last = series.t.length - 1
  const back = (ms: number) => {
    const at = ms / blockMs
    const i = Math.min(last, Math.max(0, Math.floor(at)))
    return series.t[i] + (at - i) * blockMs
  }
  for (const o of oscillations) o.episodes = o.episodes.map(e => ({ fromMs: back(e.fromMs), toMs: back(e.toMs) }))
}
