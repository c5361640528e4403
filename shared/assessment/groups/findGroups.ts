import { demodulate } from './demodulate'
import { lockedHarmonics } from './lockedHarmonics'
import { commonWander, phaseCoherence, type Demodulated } from './phaseCoherence'
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

/** Periods that differ by more cannot be the same oscillation; estimates of irregular ones scatter this far. The phase decides. */
const PERIOD_TOLERANCE = 0.15
/** Periods at which waves are demodulated lie on a grid this fine (in ln), so that each loop is demodulated a few times only. */
const GRID = 0.05
/** Chance of one pair under independence; corrected for the number of pairs that were compared. */
const FALSE_PAIR = 0.01
/** Pairs that one accepts to be in step by chance over the whole fleet. */
const EXPECTED_CHANCE_PAIRS = 0.05
/** Below this share of common power two loops do not hunt together, however many windows say so. */
const LEAST_COHERENCE = 0.6
const PERIODS_PER_WINDOW = 4

/**
 * Groups of loops that hunt together: the same period within its uncertainty, then a steady phase (coherence of
 * complex demodulates) that periods agreeing by chance do not explain: they are linked, or there are too few
 * pairs for that, or both wander together; single linkage, then each member checked against the group as a whole.
 *
 * Cost: only pairs of similar period are compared, and each loop is demodulated at a few periods only.
 *
 * @param candidates loops with an oscillation; series may differ in interval and begin
 * @param span epoch ms of the stretch to look at, e.g. a week
 * @returns groups of two or more, most members first; members by rank, likely source first
 * Source: spectral grouping after Thornhill, Shah, Huang, Vishnubhotla (2002), Spectral principal component analysis
 * of dynamic process data (idea of grouping by spectrum); the phase check is our own, built on the sample coherence.
 */
export function findGroups(candidates: readonly GroupCandidate[], { fromMs, toMs }: { fromMs: number, toMs: number }): LoopGroup[] {
  const loops = candidates.filter(c => c.periodS >= 4 * c.sampleIntervalS && Number.isFinite(c.periodS)).sort((a, b) => a.periodS - b.periodS || a.tag.localeCompare(b.tag))
  const waves = waveCache(loops, fromMs, toMs)
  const near: [number, number][] = []
  for (let i = 0; i < loops.length; i++) {
    for (let j = i + 1; j < loops.length && loops[j].periodS <= loops[i].periodS * (1 + PERIOD_TOLERANCE); j++) if (loops[i].tag !== loops[j].tag) near.push([i, j])
  }
  const parent = loops.map((_, k) => k)
  const root = (k: number): number => (parent[k] === k ? k : (parent[k] = root(parent[k])))
  for (const [i, j] of near) {
    const found = waves.compare(i, j)
    if (!found || found.coherence < LEAST_COHERENCE || found.chance >= FALSE_PAIR / near.length) continue
    // periods that agree by chance stay in step for a while: their odds are a turn in all the turns there could have been
    const byChance = 1 / (2 * PERIOD_TOLERANCE * PERIODS_PER_WINDOW * found.windows)
    if (linked(loops[i], loops[j]) || byChance * near.length < EXPECTED_CHANCE_PAIRS || found.wander.chance < FALSE_PAIR / near.length) parent[root(i)] = root(j)
  }
  const clusters = new Map<number, number[]>()
  loops.forEach((_, k) => clusters.set(root(k), [...(clusters.get(root(k)) ?? []), k]))
  const found = [...clusters.values()].filter(c => c.length >= 2).map(cluster => describe(cluster, loops, waves, fromMs, toMs)).filter(g => g !== null)
    .sort((a, b) => b.members.length - a.members.length || a.periodS - b.periodS)
  return found.filter(g => !found.some(larger => isHarmonicOf(g, larger)))
}

/** A declared link, or a common source, is a reason of its own why two loops should swing together. */
const linked = (a: GroupCandidate, b: GroupCandidate): boolean => a.upstream.includes(b.tag) || b.upstream.includes(a.tag) || a.upstream.some(tag => b.upstream.includes(tag))

/** The harmonics of a common wave are locked to each other too; they are no group of their own. */
function isHarmonicOf(g: LoopGroup, larger: LoopGroup): boolean {
  const ratio = larger.periodS / g.periodS
  const order = Math.round(ratio)
  if (g === larger || order < 2 || order > 7 || Math.abs(ratio / order - 1) > 0.08) return false
  const tags = new Set(larger.members.map(m => m.tag))
  return g.members.every(m => tags.has(m.tag))
}

type Comparison = ReturnType<typeof phaseCoherence> & { wander: ReturnType<typeof commonWander> }
interface Waves { compare: (i: number, j: number) => Comparison | null }

/** Demodulated waves by loop and grid period, made when first asked for. */
function waveCache(loops: GroupCandidate[], fromMs: number, toMs: number): Waves {
  const kept = new Map<string, Demodulated>()
  const wave = (k: number, grid: number, clock: Clock): Demodulated => {
    const key = `${k} ${grid}`
    let found = kept.get(key)
    if (!found) kept.set(key, found = demodulate(loops[k].series, { t0Ms: loops[k].t0Ms, sampleIntervalS: loops[k].sampleIntervalS, ...clock }))
    return found
  }
  return {
    compare(i, j) {
      const grid = Math.round(Math.log(loops[i].periodS * loops[j].periodS) / 2 / GRID)
      const clock = clockOf(Math.exp(grid * GRID), fromMs, toMs)
      if (clock.windows < 4 || [i, j].some(k => clock.periodS < 4 * loops[k].sampleIntervalS)) return null
      const [a, b] = [wave(i, grid, clock), wave(j, grid, clock)]
      return { ...phaseCoherence(a, b, clock.periodS), wander: commonWander(a, b) }
    },
  }
}

interface Clock { periodS: number, originMs: number, windowS: number, windows: number }
function clockOf(periodS: number, fromMs: number, toMs: number): Clock {
  const windowS = PERIODS_PER_WINDOW * periodS
  return { periodS, originMs: fromMs, windowS, windows: Math.floor((toMs - fromMs) / 1000 / windowS) }
}

/** Members measured against the strongest of them; those that single linkage only chained in are left out. */
function describe(cluster: number[], loops: GroupCandidate[], waves: Waves, fromMs: number, toMs: number): LoopGroup | null {
  const strength = cluster.reduce((sum, k) => sum + loops[k].strength, 0)
  const periodS = strength > 0 ? Math.exp(cluster.reduce((sum, k) => sum + loops[k].strength * Math.log(loops[k].periodS), 0) / strength) : loops[cluster[0]].periodS
  const clock = clockOf(periodS, fromMs, toMs)
  const reference = cluster.reduce((best, k) => (loops[k].strength > loops[best].strength ? k : best), cluster[0])
  const all = cluster.map(k => ({ loop: loops[k], ...(k === reference ? { coherence: 1, lagS: 0 } : waves.compare(reference, k) ?? { coherence: 0, lagS: 0 }) }))
    .filter(m => m.coherence >= LEAST_COHERENCE * 0.9)
  // a loop with two oscillations near each other is one member: the stronger
  const measured = all.filter(m => !all.some(o => o !== m && o.loop.tag === m.loop.tag && o.loop.strength > m.loop.strength))
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
