import type { Finding, LoopRecord, Oscillation, TimeSpan } from '../types'
import type { GroupCandidate } from './findGroups'

/** Enough points on a cycle for the fundamental and its fifth harmonic. */
const POINTS_PER_PERIOD = 24
const LEAST_CYCLES = 6

/**
 * What the search for groups looks at: each lasting oscillation of a loop (six cycles or more) with the control error
 * averaged to 24 points a period; PV where there is no SP.
 *
 * @param record samples; those outside the span are ignored
 * @returns one candidate per lasting oscillation; none is an answer
 * Source: own.
 */
export function candidatesOfLoop(loop: { tag: string, upstream: string[], oscillations: readonly Oscillation[], findings: readonly Finding[] }, record: Pick<LoopRecord, 't' | 'pv' | 'sp'>, span: TimeSpan): GroupCandidate[] {
  const lasting = loop.oscillations.filter(o => o.episodes.reduce((ms, e) => ms + e.toMs - e.fromMs, 0) / 1000 >= LEAST_CYCLES * o.periodS)
  const valve = loop.findings.find(f => f.verdict === 'huntingValve')
  const valveEvidence = valve ? valve.evidence.reduce((sum, e) => sum + (e.says === 'silent' ? 0 : e.weight), 0) : 0
  return lasting.map((o) => {
    const sampleIntervalS = o.periodS / POINTS_PER_PERIOD
    return { tag: loop.tag, series: averaged(record, span, sampleIntervalS), t0Ms: span.fromMs + sampleIntervalS * 500, sampleIntervalS, periodS: o.periodS, periodSdS: o.periodSdS, strength: o.strength, valveEvidence, upstream: loop.upstream }
  })
}

/** Means of even bins; a bin without samples is NaN, but for up to two in a row, which hold the last mean. */
function averaged({ t, pv, sp }: Pick<LoopRecord, 't' | 'pv' | 'sp'>, { fromMs, toMs }: TimeSpan, intervalS: number): Float64Array {
  const n = Math.floor((toMs - fromMs) / 1000 / intervalS)
  const series = new Float64Array(n)
  const count = new Uint32Array(n)
  for (let k = 0; k < t.length; k++) {
    const value = sp ? sp[k] - pv[k] : pv[k]
    const bin = Math.floor((t[k] - fromMs) / 1000 / intervalS)
    if (value !== value || bin < 0 || bin >= n) continue
    series[bin] += value
    count[bin]++
  }
  let since = Infinity
  for (let b = 0; b < n; b++) {
    if (count[b] > 0) { series[b] /= count[b]; since = 0 }
    // slower samples than bins: else a loop sampled once a bin or less would be all holes
    else if (b > 0 && ++since <= 2) series[b] = series[b - 1]
    else series[b] = NaN
  }
  return series
}
