import { describe, expect, it } from 'vitest'
import { demodulate } from '../../../shared/assessment/groups/demodulate'
import { findGroups, type GroupCandidate } from '../../../shared/assessment/groups/findGroups'
import { lockedHarmonics } from '../../../shared/assessment/groups/lockedHarmonics'
import { commonWander, phaseCoherence } from '../../../shared/assessment/groups/phaseCoherence'
import { rankSources } from '../../../shared/assessment/groups/rankSources'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'

const DT = 30
const N = 7 * 24 * 3600 / DT
const span = { fromMs: 0, toMs: N * DT * 1000 }

/** A wave whose phase wanders, as any limit cycle's does: a random walk of `wander` rad per period. */
function wanderingPhase(seed: number, periodS: number, wander: number): Float64Array {
  const random = seededRandom(seed)
  const phase = new Float64Array(N)
  let drift = 0
  for (let k = 0; k < N; k++) {
    drift += random.normal() * wander * Math.sqrt(DT / periodS)
    phase[k] = 2 * Math.PI * k * DT / periodS + drift
  }
  return phase
}
function loop(tag: string, phase: Float64Array, lagS: number, periodS: number, seed: number, more: Partial<GroupCandidate> = {}): GroupCandidate {
  const random = seededRandom(seed)
  const series = Float64Array.from(phase, (p) => Math.sin(p - 2 * Math.PI * lagS / periodS) + 0.3 * random.normal())
  return { tag, series, t0Ms: 0, sampleIntervalS: DT, periodS, periodSdS: periodS * 0.01, strength: 0.8, valveEvidence: 0, upstream: [], ...more }
}

describe('demodulate', () => {
  it('gives amplitude and phase of a sine: closed form A cos(wt + phi) -> A exp(i phi)', () => {
    const periodS = 600
    const x = Float64Array.from({ length: N }, (_, k) => 2.5 * Math.cos(2 * Math.PI * k * DT / periodS + 0.7))
    const { re, im } = demodulate(x, { t0Ms: 0, sampleIntervalS: DT, periodS, originMs: 0, windowS: 2400, windows: 50 })
    for (let w = 0; w < 50; w++) {
      expect(Math.hypot(re[w], im[w])).toBeCloseTo(2.5, 6)
      expect(Math.atan2(im[w], re[w])).toBeCloseTo(0.7, 6)
    }
  })
  it('does not depend on where the record begins', () => {
    const periodS = 600
    const x = Float64Array.from({ length: N }, (_, k) => Math.cos(2 * Math.PI * k * DT / periodS))
    const whole = demodulate(x, { t0Ms: 0, sampleIntervalS: DT, periodS, originMs: 0, windowS: 2400, windows: 20 })
    const later = demodulate(x.slice(70), { t0Ms: 70 * DT * 1000, sampleIntervalS: DT, periodS, originMs: 0, windowS: 2400, windows: 20 })
    expect(later.re[0]).toBeNaN()
    for (let w = 1; w < 20; w++) expect(later.re[w]).toBeCloseTo(whole.re[w], 9)
  })
  it('leaves windows with too many gaps out, and refuses a period below four samples', () => {
    const x = new Float64Array(N).fill(NaN, 0, 100)
    const { re } = demodulate(x, { t0Ms: 0, sampleIntervalS: DT, periodS: 600, originMs: 0, windowS: 2400, windows: 3 })
    expect(re[0]).toBeNaN()
    expect(re[2]).toBe(0)
    expect(() => demodulate(x, { t0Ms: 0, sampleIntervalS: DT, periodS: 90, originMs: 0, windowS: 2400, windows: 3 })).toThrow(/below 4 samples/)
  })
})

describe('phaseCoherence', () => {
  it('is 1 for the same wave and tells the lag of the second behind the first', () => {
    const periodS = 600
    const wave = (lagS: number) => demodulate(Float64Array.from({ length: N }, (_, k) => Math.sin(2 * Math.PI * (k * DT - lagS) / periodS)), { t0Ms: 0, sampleIntervalS: DT, periodS, originMs: 0, windowS: 2400, windows: 100 })
    const { coherence, lagS } = phaseCoherence(wave(0), wave(75), periodS)
    expect(coherence).toBeCloseTo(1, 9)
    expect(lagS).toBeCloseTo(75, 6)
  })
  it('has the published distribution under independence: P(c^2 > x) = (1 - x)^(K-1) (Goodman 1957)', () => {
    const random = seededRandom(5)
    const draw = (k: number) => ({ re: Float64Array.from({ length: k }, () => random.normal()), im: Float64Array.from({ length: k }, () => random.normal()) })
    let below = 0
    for (let run = 0; run < 4000; run++) if (phaseCoherence(draw(12), draw(12), 1).chance < 0.05) below++
    expect(below / 4000).toBeGreaterThan(0.04)
    expect(below / 4000).toBeLessThan(0.06)
  })
})

describe('lockedHarmonics', () => {
  const options = { t0Ms: 0, sampleIntervalS: DT, periodS: 1500, originMs: 0, windowS: 6000, windows: 90 }
  const wave = (shape: (p: number) => number, noise: number) => {
    const random = seededRandom(4)
    return Float64Array.from(wanderingPhase(9, 1500, 0.15), p => shape(p) + noise * random.normal())
  }
  // Fourier series of the waves (handbook): square 1/k for odd k, triangle 1/k^2 for odd k
  it('gives the Fourier ratios of square and triangle, and none for a sine, with noise', () => {
    expect(lockedHarmonics(wave(p => Math.sign(Math.sin(p)), 0.3), options).ratio).toBeCloseTo(Math.hypot(1 / 3, 1 / 5), 1)
    expect(lockedHarmonics(wave(p => 2 / Math.PI * Math.asin(Math.sin(p)), 0.1), options).ratio).toBeGreaterThan(0.08)
    expect(lockedHarmonics(wave(p => 2 / Math.PI * Math.asin(Math.sin(p)), 0.1), options).ratio).toBeLessThan(0.16)
    expect(lockedHarmonics(wave(Math.sin, 0.3), options).ratio).toBe(0)
  })
  it('cannot tell on a few windows', () => {
    expect(lockedHarmonics(wave(Math.sin, 0), { ...options, windows: 4 }).ratio).toBeNaN()
  })
})

describe('commonWander', () => {
  const wave = (phase: Float64Array, seed: number) => {
    const random = seededRandom(seed)
    return demodulate(Float64Array.from(phase, p => Math.sin(p) + 0.2 * random.normal()), { t0Ms: 0, sampleIntervalS: DT, periodS: 900, originMs: 0, windowS: 3600, windows: 160 })
  }
  it('is strong for two loops that follow one wave, and absent for two of their own', () => {
    const common = wanderingPhase(7, 900, 0.2)
    expect(commonWander(wave(common, 1), wave(common, 2)).chance).toBeLessThan(1e-4)
    let alarms = 0
    for (let run = 0; run < 100; run++) if (commonWander(wave(wanderingPhase(300 + run, 900, 0.2), run + 1), wave(wanderingPhase(600 + run, 900, 0.2), run + 500)).chance < 0.05) alarms++
    expect(alarms).toBeLessThanOrEqual(12)
  })
  it('cannot tell from a few windows', () => {
    const short = { re: Float64Array.of(1, 1, 1), im: Float64Array.of(0, 0, 0) }
    expect(commonWander(short, short).chance).toBe(1)
  })
})

describe('findGroups', () => {
  it('finds the loops of one wave with their lags, and leaves a loop of another period alone', () => {
    const common = wanderingPhase(1, 1200, 0.2)
    const groups = findGroups([
      loop('A', common, 0, 1200, 11, { strength: 0.95, valveEvidence: 2 }), loop('B', common, 100, 1215, 12), loop('C', common, 300, 1190, 13),
      loop('D', wanderingPhase(2, 400, 0.2), 0, 400, 14),
    ], span)
    expect(groups).toHaveLength(1)
    expect(groups[0].members.map(m => m.tag).sort()).toEqual(['A', 'B', 'C'])
    expect(groups[0].likelySource).toBe('A')
    const lag = (tag: string) => groups[0].members.find(m => m.tag === tag)!.lagS
    expect(lag('A')).toBe(0)
    expect(Math.abs(lag('B') - 100)).toBeLessThan(25)
    expect(Math.abs(lag('C') - 300)).toBeLessThan(25)
  })
  it('does not group independent loops whose periods agree by chance: below 5 % of 100 pairs', () => {
    let grouped = 0
    for (let run = 0; run < 100; run++) {
      const found = findGroups([loop('A', wanderingPhase(run * 2 + 100, 900, 0.3), 0, 900, run + 1000), loop('B', wanderingPhase(run * 2 + 101, 905, 0.3), 0, 905, run + 2000)], span)
      if (found.length) grouped++
    }
    expect(grouped).toBeLessThan(5)
  })
  it('does not group a large fleet of loops whose periods lie close by chance: below 5 % of 300', () => {
    const random = seededRandom(77)
    const fleet = Array.from({ length: 300 }, (_, k) => { const periodS = 300 * 20 ** random.uniform(); return loop(`L${k}`, wanderingPhase(5000 + k, periodS, 0.1), 0, periodS, 7000 + k) })
    const grouped = findGroups(fleet, span).reduce((n, g) => n + g.members.length, 0)
    expect(grouped).toBeLessThan(15)
  })
  it('does not report the harmonics of a group as a group of its own', () => {
    const common = wanderingPhase(3, 1200, 0.2)
    const third = common.map(p => 3 * p)
    const groups = findGroups(['A', 'B', 'C'].flatMap((tag, k) => [loop(tag, common, 40 * k, 1200, 20 + k), ...(k < 2 ? [loop(tag, third, 10 * k, 400, 30 + k, { strength: 0.1 })] : [])]), span)
    expect(groups.map(g => g.members.length)).toEqual([3])
  })
  it('answers nothing on nothing, on one loop and on a span of a few cycles', () => {
    expect(findGroups([], span)).toEqual([])
    expect(findGroups([loop('A', wanderingPhase(1, 900, 0.1), 0, 900, 1)], span)).toEqual([])
    const common = wanderingPhase(1, 1200, 0.1)
    expect(findGroups([loop('A', common, 0, 1200, 1), loop('B', common, 0, 1200, 2)], { fromMs: 0, toMs: 3 * 1200 * 1000 })).toEqual([])
  })
  it('leaves its inputs alone', () => {
    const a = loop('A', wanderingPhase(1, 900, 0.1), 0, 900, 1)
    const before = a.series.slice()
    findGroups([a, loop('B', wanderingPhase(1, 900, 0.1), 50, 900, 2)], span)
    expect(a.series).toEqual(before)
  })
})

describe('rankSources', () => {
  const plain = { strength: 0.5, lagS: 0, valveEvidence: 0, nonlinearity: null, upstream: [] as string[] }
  it('puts the most nonlinear loop first (Thornhill 2005), and says so', () => {
    const [first] = rankSources([{ ...plain, tag: 'A', nonlinearity: 0.05 }, { ...plain, tag: 'B', nonlinearity: 0.3 }], 100)
    expect(first.tag).toBe('B')
    expect(first.reasons.join()).toContain('least sine-like')
  })
  it('puts a declared upstream loop before the ones it feeds, all else equal, through links of links', () => {
    const ranking = rankSources([{ ...plain, tag: 'C', lagS: 20, upstream: ['B'] }, { ...plain, tag: 'B', lagS: 10, upstream: ['A'] }, { ...plain, tag: 'A' }], 100)
    expect(ranking.map(r => r.tag)[0]).toBe('A')
    expect(ranking.map(r => r.tag)[2]).toBe('C')
  })
  it('does not hang on links in a circle', () => {
    expect(rankSources([{ ...plain, tag: 'A', upstream: ['B'] }, { ...plain, tag: 'B', upstream: ['A'] }], 100)).toHaveLength(2)
  })
})
