import type { AnalysisSeries } from '../preparation/analysisSeries'
import { findSetpointResponses } from '../response/setpointResponses'
import type { LoopSetup, SetpointResponse } from '../types'
import type { Recoveries } from '../verdict/recoveries'
import type { Explainer } from './Explainer'

const KEYS = ['overshoot', 'riseTimeS', 'settlingTimeS', 'decayRatio'] as const

/** Responses to set-point steps, and the medians that stand as figures of the week. */
export function explainResponses(explain: Explainer, series: AnalysisSeries | null, setup: LoopSetup, activity: 'absent' | 'still' | 'stepped' | 'moving', noise: number, r: Recoveries | null): SetpointResponse[] {
  const refuse = (reason: string) => {
    explain.withholdAll(['setpointMoves', ...KEYS], reason)
    return []
  }
  explain.set('idleIndex', r?.idleIndex, r?.count ?? 0, { settlingS: setup.settlingS, cutShareOfPeak: 0.05 }, { recoveries: r?.count ?? 0, slowShare: r?.slowShare ?? null }, 'Fewer than three clear recoveries after an upset were found.')
  explain.set('areaIndex', r?.areaIndex, r?.count ?? 0, { settlingS: setup.settlingS }, { recoveries: r?.count ?? 0 }, 'Fewer than three clear recoveries after an upset were found.')
  if (activity === 'absent') return refuse('The record has no SP.')
  if (!series || !series.sp) return refuse('Too few samples in a normal mode.')
  if (activity === 'moving') return refuse('The set point moves all the time, so single steps cannot be seen.')
  const responses: SetpointResponse[] = []
  for (const s of series.segments) {
    responses.push(...findSetpointResponses(series.sp.subarray(s.begin, s.end), series.pv.subarray(s.begin, s.end), { sampleIntervalS: series.intervalS, settlingS: setup.settlingS, noiseLevel: noise, t0Ms: series.t[s.begin] }))
  }
  const parameters = { analysisIntervalS: series.intervalS, settlingS: setup.settlingS, noise }
  explain.set('setpointMoves', responses.length, series.used, parameters, { settled: responses.filter(p => p.settled).length })
  const median = (values: (number | null)[]) => {
    const v = values.filter((x): x is number => x !== null).sort((a, b) => a - b)
    return v.length ? v[v.length >> 1] : NaN
  }
  const none = responses.length ? 'No response was complete enough.' : 'No set-point step was found.'
  explain.set('overshoot', median(responses.map(p => p.overshootFraction)), responses.length, parameters, { responses: responses.length }, none)
  explain.set('riseTimeS', median(responses.map(p => p.riseTimeS)), responses.length, parameters, { responses: responses.length }, none)
  explain.set('settlingTimeS', median(responses.map(p => p.settlingTimeS)), responses.length, parameters, { responses: responses.length }, none)
  explain.set('decayRatio', median(responses.map(p => p.decayRatio)), responses.length, parameters, { responses: responses.length }, none)
  return responses
}
