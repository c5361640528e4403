import type { Knex } from 'knex'
import { listHuntingLoops, replaceGroups, type HuntingLoop } from '../../../db/repositories/groups'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import type { TrendBlock } from '../../../db/blocks/types'
import { findGroups, type GroupCandidate } from '../../../shared/assessment/groups/findGroups'
import type { Oscillation } from '../../../shared/assessment/types'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { formatDuration } from '../../../shared/format/duration'
import { loopRecord } from '../assessments/loopRecord'
import { getSettings } from '../settings'

/** Enough points on a cycle for the fundamental and its fifth harmonic. */
const POINTS_PER_PERIOD = 24
const LEAST_CYCLES = 6
const LOOPS_AT_ONCE = 50

const letterOf = (k: number): string => (k < 26 ? String.fromCharCode(65 + k) : letterOf(Math.floor(k / 26) - 1) + letterOf(k % 26))

/** Loops that hunt together in a week, over the whole fleet. Runs again without harm: it puts the new groups in place of the old. */
export async function findGroupsOfWeek(trx: Knex.Transaction, week: string): Promise<void> {
  const { zone } = await getSettings(trx)
  const edges = weekFrame(week, zone).hourEdges
  const span = { fromMs: edges[0]!, toMs: edges[edges.length - 1]! }
  const hunting = await listHuntingLoops(trx, week)
  const candidates: GroupCandidate[] = []
  for (let at = 0; at < hunting.length; at += LOOPS_AT_ONCE) {
    const part = hunting.slice(at, at + LOOPS_AT_ONCE)
    const blocks = await listBlocks(trx, part.map(l => l.loopId), span.fromMs, span.toMs)
    for (const loop of part) candidates.push(...candidatesOf(loop, blocks.filter(b => b.loopId === loop.loopId), span))
  }
  const idOf = new Map(hunting.map(l => [l.tag, l.loopId]))
  const groups = findGroups(candidates, span)
  await replaceGroups(trx, week, groups.map((g, k) => ({
    letter: letterOf(k), periodS: g.periodS, likelySource: idOf.get(g.likelySource)!,
    evidence: [`${g.members.length} loops share a period of ${formatDuration(g.periodS)} and keep a steady phase.`, ...g.members[0]!.reasons.map(r => `${g.likelySource}: ${r}.`)],
    members: g.members.map(m => ({ loopId: idOf.get(m.tag)!, strength: m.strength, lagS: m.lagS, rank: m.rank, score: m.score, reasons: m.reasons })),
  })))
}

function candidatesOf(loop: HuntingLoop, blocks: TrendBlock[], { fromMs, toMs }: { fromMs: number, toMs: number }): GroupCandidate[] {
  const lasting = loop.oscillations.filter(o => o.episodes.reduce((ms, e) => ms + e.toMs - e.fromMs, 0) / 1000 >= LEAST_CYCLES * o.periodS)
  if (lasting.length === 0 || blocks.length === 0) return []
  const { t, pv, sp } = loopRecord(blocks, fromMs, toMs, [])
  const valve = loop.findings.find(f => f.verdict === 'huntingValve')
  const valveEvidence = valve ? valve.evidence.reduce((sum, e) => sum + (e.says === 'silent' ? 0 : e.weight), 0) : 0
  return lasting.map((o: Oscillation) => {
    const sampleIntervalS = o.periodS / POINTS_PER_PERIOD
    return { tag: loop.tag, ...averaged(t, pv, sp, fromMs, toMs, sampleIntervalS), sampleIntervalS, periodS: o.periodS, periodSdS: o.periodSdS, strength: o.strength, valveEvidence, upstream: loop.upstream }
  })
}

/** Control error (PV where there is no SP) averaged into even bins; a bin without samples is NaN, one between sparse samples takes the last. */
function averaged(t: Float64Array, pv: Float64Array, sp: Float64Array | null, fromMs: number, toMs: number, intervalS: number): { series: Float64Array, t0Ms: number } {
  const n = Math.floor((toMs - fromMs) / 1000 / intervalS)
  const series = new Float64Array(n)
  const count = new Uint32Array(n)
  for (let k = 0; k < t.length; k++) {
    const value = sp ? sp[k]! - pv[k]! : pv[k]!
    const bin = Math.floor((t[k]! - fromMs) / 1000 / intervalS)
    if (value !== value || bin < 0 || bin >= n) continue
    series[bin] += value
    count[bin]++
  }
  let since = Infinity
  for (let b = 0; b < n; b++) {
    if (count[b]! > 0) { series[b] = series[b]! / count[b]!; since = 0 }
    // slower samples than bins: hold for up to two bins, else a loop sampled once a bin or less would be all holes
    else if (b > 0 && ++since <= 2) series[b] = series[b - 1]!
    else series[b] = NaN
  }
  return { series, t0Ms: fromMs + intervalS * 500 }
}
