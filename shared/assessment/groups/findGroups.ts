import { demodulate } from './demodulate'
import { lockedHarmonics } from './lockedHarmonics'
import { phaseCoherence, type Demodulated } from './phaseCoherence'
import { rankSources, type SourceRank } from './rankSources'

/** A loop with a detected oscillation, as the search for groups needs it. */
export interface GroupCandidate {
  tag: string
  /** control error (or PV) averaged down, NaN where missing */
  series: Float64Array
  t0Ms: number
  sampleIntervalS: number
  periodS: number
  periodSdS: number
  /** share of the error's variance, 0..1 */
  strength: number
  /** natural log likelihood ratio for a sticking valve; 0 when nothing is known */
  valveEvidence: number
  upstream: string[]
}

export interface GroupMember { tag: string, strength: number, lagS: number, coherence: number, rank: number, score: number, reasons: string[] }
export interface LoopGroup { periodS: number, members: GroupMember[], likelySource: string, ranking: SourceRank[] }

/** Periods that differ by less than this belong together, whatever their own scatter says. */
const PERIOD_TOLERANCE = 0.05
/** Chance of one pair under independence; corrected for the number of pairs that were compared. */
const FALSE_PAIR = 0.01
/** Below this share of common power two loops do not hunt together, however many windows say so. */
const LEAST_COHERENCE = 0.6
const PERIODS_PER_WINDOW = 4

/**
 * Groups of loops that hunt together: the same period within its uncertainty, then a steady phase (coherence of
 * complex demodulates), single linkage, then each member checked against the group as a whole.
 *
 * Cost: only pairs of similar period are compared; with 2,000 loops of which 500 hunt a second or so.
 *
 * @param candidates loops with an oscillation; series may differ in interval and begin
 * @param span epoch ms of the stretch to look at, e.g. a week
 * @returns groups of two or more, most members first; members by rank, likely source first
 * Source: spectral grouping after Thornhill, Shah, Huang, Vishnubhotla (2002), Spectral principal component analysis
 * of dynamic process data (idea of grouping by spectrum); the phase check is our own, built on the sample coherence.
 */
export function findGroups(candidates: readonly GroupCandidate[], { fromMs, toMs }: { fromMs: number, toMs: number }): LoopGroup[] {
  const sorted = candidates.filter(c => c.periodS >= 4 * c.sampleIntervalS && Number.isFinite(c.periodS)).sort((a, b) => a.periodS - b.periodS || a.tag.localeCompare(b.tag))
  const groups: LoopGroup[] = []
  let begin = 0
  for (let end = 1; end <= sorted.length; end++) {
    if (end < sorted.length && close(sorted[end - 1], sorted[end])) continue
    if (end - begin >= 2) groups.push(...groupsOfOnePeriod(sorted.slice(begin, end), fromMs, toMs))
    begin = end
  }
  return groups.sort((a, b) => b.members.length - a.members.length || a.periodS - b.periodS)
}

function close(a: GroupCandidate, b: GroupCandidate): boolean {
  const scatter = 2 * Math.hypot(a.periodSdS, b.periodSdS)
  return Math.abs(a.periodS - b.periodS) <= Math.min(0.15 * a.periodS, Math.max(PERIOD_TOLERANCE * a.periodS, scatter))
}

function groupsOfOnePeriod(loops: GroupCandidate[], fromMs: number, toMs: number): LoopGroup[] {
  // the strongest loops set the clock: their period is known best
  const weight = loops.reduce((sum, l) => sum + l.strength, 0)
  const periodS = weight > 0 ? Math.exp(loops.reduce((sum, l) => sum + l.strength * Math.log(l.periodS), 0) / weight) : loops[0].periodS
  const windowS = PERIODS_PER_WINDOW * periodS
  const windows = Math.floor((toMs - fromMs) / 1000 / windowS)
  if (windows < 4) return []
  const waves: (Demodulated | null)[] = loops.map(l => periodS >= 4 * l.sampleIntervalS
    ? demodulate(l.series, { t0Ms: l.t0Ms, sampleIntervalS: l.sampleIntervalS, periodS, originMs: fromMs, windowS, windows })
    : null)
  const pairs = loops.length * (loops.length - 1) / 2
  const parent = loops.map((_, k) => k)
  const root = (k: number): number => (parent[k] === k ? k : (parent[k] = root(parent[k])))
  for (let i = 0; i < loops.length; i++) {
    for (let j = i + 1; j < loops.length; j++) {
      if (!waves[i] || !waves[j]) continue
      const { coherence, chance } = phaseCoherence(waves[i]!, waves[j]!, periodS)
      if (coherence >= LEAST_COHERENCE && chance < FALSE_PAIR / pairs) parent[root(i)] = root(j)
    }
  }
  const clusters = new Map<number, number[]>()
  loops.forEach((_, k) => clusters.set(root(k), [...(clusters.get(root(k)) ?? []), k]))
  const clock = { periodS, originMs: fromMs, windowS, windows }
  return [...clusters.values()].filter(c => c.length >= 2).map(cluster => describe(cluster, loops, waves, clock)).filter(g => g !== null)
}

/** Members measured against the group's common wave; those that single linkage only chained in are left out. */
function describe(cluster: number[], loops: GroupCandidate[], waves: (Demodulated | null)[], clock: { periodS: number, originMs: number, windowS: number, windows: number }): LoopGroup | null {
  const { periodS } = clock
  const reference = cluster.reduce((best, k) => (loops[k].strength > loops[best].strength ? k : best), cluster[0])
  const measured = cluster.map(k => ({ loop: loops[k], ...phaseCoherence(waves[reference]!, waves[k]!, periodS) }))
    .filter(m => m.coherence >= LEAST_COHERENCE * 0.9)
  if (measured.length < 2) return null
  const ranking = rankSources(measured.map(m => ({ tag: m.loop.tag, strength: m.loop.strength, lagS: m.lagS, valveEvidence: m.loop.valveEvidence, nonlinearity: nonlinearityOf(m.loop, clock), upstream: m.loop.upstream })), periodS)
  const members = ranking.map((r, k) => {
    const m = measured.find(x => x.loop.tag === r.tag)!
    return { tag: r.tag, strength: m.loop.strength, lagS: m.lagS, coherence: m.coherence, rank: k + 1, score: r.score, reasons: r.reasons }
  })
  // lags are told against the likely source, because that is how people read them
  const origin = members[0].lagS
  for (const m of members) m.lagS = wrap(m.lagS - origin, periodS)
  return { periodS, members, likelySource: members[0].tag, ranking }
}

function wrap(lagS: number, periodS: number): number {
  const turns = lagS / periodS
  return (turns - Math.ceil(turns - 0.5)) * periodS
}

function nonlinearityOf(loop: GroupCandidate, clock: { periodS: number, originMs: number, windowS: number, windows: number }): number | null {
  const { ratio } = lockedHarmonics(loop.series, { t0Ms: loop.t0Ms, sampleIntervalS: loop.sampleIntervalS, ...clock })
  return ratio === ratio ? ratio : null
}
