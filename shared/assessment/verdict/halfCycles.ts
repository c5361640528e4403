/**
 * Irregular hunting: runs of large half-cycles of the control error that alternate in sign and are alike in size and length, though
 * too uneven for a spectral peak (limit cycles of sticking valves are often so).
 *
 * Half-cycles are cut where the error crosses zero by more than the dead zone; a half-cycle is large when its peak reaches
 * `least`. A run of at least 12 half-cycles, four in five of them large, with robust variation of their lengths and
 * peaks below 0.5 and 0.45, counts. Disturbances that pass through a well damped loop give peaks and lengths of every size,
 * with variations near 0.7 and above (checked on simulated healthy and sluggish loops).
 * Cost O(n). Source: T. Hägglund 1995, A control-loop performance monitor, for the count of large half-cycles; the test of likeness is ours.
 */
import type { TimeSpan } from '../types'
import type { AnalysisSeries } from '../preparation/analysisSeries'
import { select } from '../statistics/select'

export interface HalfCycles {
  /** large half-cycles in all segments */
  count: number
  /** of them in runs that count as hunting */
  inRuns: number
  /** robust coefficients of variation over the large half-cycles, NaN below 12 */
  lengthVariation: number
  peakVariation: number
  /** twice the median length, s; NaN below 12 */
  periodS: number
  /** median peak */
  amplitude: number
  runs: TimeSpan[]
}

const RUN = 12
const LARGE_SHARE = 0.8

/** @param least smallest peak that counts, PV unit, > 0 */
export function halfCycles(series: AnalysisSeries, least: number): HalfCycles {
  if (!(least > 0)) throw new RangeError(`halfCycles: least must be above 0, got ${least}`)
  const lengths: number[] = []
  const peaks: number[] = []
  const runs: TimeSpan[] = []
  let inRuns = 0
  const zone = 0.15 * least
  for (const s of series.segments) {
    const halves: { from: number, to: number, peak: number }[] = []
    // the error's slow level is not part of the swing: the segment's mean is taken off
    let mean = 0
    for (let i = s.begin; i < s.end; i++) mean += series.error[i]
    mean /= s.end - s.begin
    let side = 0
    let from = s.begin
    let peak = 0
    for (let i = s.begin; i < s.end; i++) {
      const e = series.error[i] - mean
      const now = e > zone ? 1 : e < -zone ? -1 : 0
      if (now !== 0 && now !== side) {
        if (side !== 0) halves.push({ from, to: i, peak })
        side = now
        from = i
        peak = 0
      }
      if (Math.abs(e) > peak) peak = Math.abs(e)
    }
    for (const h of halves) {
      if (h.peak >= least) {
        lengths.push(h.to - h.from)
        peaks.push(h.peak)
      }
    }
    // longest alike runs, greedily from the left
    let a = 0
    while (a + RUN <= halves.length) {
      if (halves[a].peak < least || !alike(halves, a, a + RUN, least)) {
        a++
        continue
      }
      let b = a + RUN
      while (b < halves.length && alike(halves, b + 1 - RUN, b + 1, least)) b++
      runs.push({ fromMs: series.t[halves[a].from], toMs: series.t[halves[b - 1].to - 1] + series.intervalS * 1000 })
      inRuns += b - a
      a = b
    }
  }
  const enough = lengths.length >= RUN
  const allLengths = new Float64Array(lengths)
  const allPeaks = new Float64Array(peaks)
  return {
    count: lengths.length,
    inRuns,
    lengthVariation: enough ? spread(allLengths, quantile) : NaN,
    peakVariation: enough ? spread(allPeaks, quantile) : NaN,
    periodS: enough ? 2 * quantile(allLengths, 0.5) * series.intervalS : NaN,
    amplitude: enough ? quantile(allPeaks, 0.5) : NaN,
    runs,
  }
}

const lengthOf = new Float64Array(RUN)
const peakOf = new Float64Array(RUN)

function alike(halves: { from: number, to: number, peak: number }[], from: number, to: number, least: number): boolean {
  let large = 0
  for (let i = from; i < to; i++) if (halves[i].peak >= least) large++
  if (large < LARGE_SHARE * (to - from)) return false
  for (let i = from; i < to; i++) insert(lengthOf, i - from, halves[i].to - halves[i].from)
  if (!(spread(lengthOf, quantileSorted) < 0.5)) return false
  for (let i = from; i < to; i++) insert(peakOf, i - from, halves[i].peak)
  return spread(peakOf, quantileSorted) < 0.45
}

/** Insertion into the ascending first `count` values. */
function insert(a: Float64Array, count: number, x: number): void {
  let k = count
  while (k > 0 && a[k - 1] > x) {
    a[k] = a[k - 1]
    k--
  }
  a[k] = x
}

function quantileSorted(s: Float64Array, f: number): number {
  return s[Math.round(f * (s.length - 1))]
}

/** The same of unsorted values, which it reorders. */
function quantile(a: Float64Array, f: number): number {
  return select(a, Math.round(f * (a.length - 1)))
}

/** Half the width from 16 to 84 % over the median: the coefficient of variation of a normal sample, deaf to outliers. */
function spread(a: Float64Array, at: (a: Float64Array, f: number) => number): number {
  return (at(a, 0.84) - at(a, 0.16)) / 2 / at(a, 0.5)
}
