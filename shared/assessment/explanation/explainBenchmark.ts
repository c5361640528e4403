import { delaySamples } from '../benchmark/delaySamples'
import { ratioByHorizon } from '../benchmark/ratioByHorizon'
import { varianceBenchmark } from '../benchmark/varianceBenchmark'
import type { AnalysisSeries } from '../preparation/analysisSeries'
import { isInsufficient, type LoopSetup, type LoopWeekAssessment } from '../types'
import type { Explainer } from './Explainer'
import { sentence } from './sentence'

const BENCHMARK_SAMPLES = 20_000

/** Minimum-variance ratio on the segments of the analysis series. */
export function explainBenchmark(explain: Explainer, series: AnalysisSeries | null, setup: LoopSetup, refused: string | null): LoopWeekAssessment['benchmarkByHorizon'] {
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
  const curve = ratioByHorizon(segments, { longestSamples: Math.max(30, 2 * b), models: v.models })
  if (isInsufficient(curve)) return null
  return {
    horizonS: Array.from(curve.ratio, (_, i) => (i + 1) * series.intervalS),
    ratio: Array.from(curve.ratio, r => Number(r.toFixed(4))),
  }
}
