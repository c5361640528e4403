import { autocorrelation } from '../statistics/autocorrelation'
import { welchSpectrum } from '../spectrum/welchSpectrum'
import type { AnalysisSeries } from '../preparation/analysisSeries'
import type { LoopWeekAssessment } from '../types'

const PLOT_POINTS = 600

/** PV over OP on a stretch, at most 600 points from its middle. */
export function pvOpOf(series: AnalysisSeries, begin: number, end: number, periodS: number | null): LoopWeekAssessment['pvOp'] {
  const { op, pv, t, intervalS } = series
  if (!op || end - begin < 16) return null
  const wish = periodS === null ? PLOT_POINTS : Math.max(64, Math.ceil((12 * periodS) / intervalS))
  const length = Math.min(end - begin, wish)
  const from = begin + ((end - begin - length) >> 1)
  const stride = Math.ceil(length / PLOT_POINTS)
  const out: { op: number[], pv: number[] } = { op: [], pv: [] }
  for (let i = from; i < from + length; i += stride) {
    out.op.push(Number(op[i].toPrecision(6)))
    out.pv.push(Number(pv[i].toPrecision(6)))
  }
  return { ...out, window: { fromMs: t[from], toMs: t[from + length - 1] + intervalS * 1000 } }
}

/** Autocorrelation and spectrum of the longest segment, thinned for drawing. */
export function rhythmOf(series: AnalysisSeries, settlingS: number, periodS?: number): LoopWeekAssessment['rhythm'] {
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
    correlation.push(Number(acf[k].toFixed(4)) || 0)
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
