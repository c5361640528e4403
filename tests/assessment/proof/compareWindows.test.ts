import { describe, expect, it } from 'vitest'
import { compareWindows, type ProofRecord } from '../../../shared/assessment/proof/compareWindows'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'

const BINS = 1008 // a week in bins of ten minutes
const loop = { pvSpan: 100, opSpan: 100, settlingS: 1800, seed: 7 }

/** Error as a first-order autoregressive process with known deviation: mean |e| of a normal is sd sqrt(2/pi). */
function record(seed: number, sd: number, lostShare: number, more: Partial<ProofRecord> = {}, bins = BINS): ProofRecord {
  const random = seededRandom(seed)
  const phi = 0.7
  const error = new Float64Array(bins)
  let e = 0
  for (let k = 0; k < bins; k++) error[k] = e = phi * e + Math.sqrt(1 - phi * phi) * sd * random.normal()
  const lostHours = Float64Array.from({ length: Math.round(bins / 6) }, () => (random.uniform() < lostShare ? 1 : 0))
  return { error, absolute: error.map(Math.abs), square: error.map(v => v * v), binS: 600, lostHours, setpointMean: 50, outputMean: 40, ...more }
}

describe('compareWindows', () => {
  it('tells a loop whose error halved, with ratios near the closed form (IAE 0.5, variance 0.25)', () => {
    const c = compareWindows(record(1, 2, 0.4), record(2, 1, 0.05), loop)
    expect(c.verdict).toBe('better')
    expect(c.iaeRatio!.value).toBeGreaterThan(0.43)
    expect(c.iaeRatio!.value).toBeLessThan(0.57)
    expect(c.varianceRatio!.low).toBeLessThan(0.25)
    expect(c.varianceRatio!.high).toBeGreaterThan(0.25)
    // 35 % fewer lost hours of 168 are 58.8
    expect(c.lostHoursWonPerWeek!.low).toBeLessThan(58.8)
    expect(c.lostHoursWonPerWeek!.high).toBeGreaterThan(58.8)
  })
  it('says the opposite with before and after exchanged', () => {
    expect(compareWindows(record(2, 1, 0.05), record(1, 2, 0.4), loop).verdict).toBe('worse')
  })
  it('covers the true ratio in about 95 % of cases and calls no change better in few (closed form, 60 seeds)', () => {
    let covered = 0
    let called = 0
    for (let run = 0; run < 60; run++) {
      const c = compareWindows(record(1000 + run, 1, 0, {}, 504), record(5000 + run, 1, 0, {}, 504), { ...loop, seed: run })
      if (c.iaeRatio!.low <= 1 && c.iaeRatio!.high >= 1) covered++
      if (c.verdict !== 'noChange') called++
    }
    expect(covered).toBeGreaterThanOrEqual(52)
    expect(called).toBeLessThanOrEqual(8)
  })
  it('does not depend on the unit of the process variable', () => {
    const scale = (r: ProofRecord): ProofRecord => ({ ...r, error: r.error.map(v => 9 * v), absolute: r.absolute.map(v => 9 * v), square: r.square.map(v => 81 * v) })
    const a = compareWindows(record(1, 2, 0.4), record(2, 1, 0.05), loop)
    const b = compareWindows(scale(record(1, 2, 0.4)), scale(record(2, 1, 0.05)), { ...loop, pvSpan: 900 })
    expect(b.iaeRatio!.value).toBeCloseTo(a.iaeRatio!.value, 9)
    expect(b.verdict).toBe(a.verdict)
  })
  it('cannot tell where the time is too short, or set point or load differ', () => {
    expect(compareWindows(record(1, 2, 0.4), record(2, 1, 0, {}, 12), loop)).toMatchObject({ verdict: 'cannotTell', iaeRatio: null })
    const moved = compareWindows(record(1, 2, 0.4), record(2, 1, 0, { setpointMean: 75 }), loop)
    expect(moved.verdict).toBe('cannotTell')
    expect(moved.reason).toContain('set point differs by 25.0 % of span')
    expect(compareWindows(record(1, 2, 0.4), record(2, 1, 0, { outputMean: 80 }), loop).reason).toContain('load')
  })
  it('judges a loop that was in manual all week by its lost hours alone', () => {
    const none = new Float64Array(BINS).fill(NaN)
    const c = compareWindows(record(1, 1, 0, { absolute: none, error: none, square: none, lostHours: new Float64Array(168).fill(1), setpointMean: NaN, outputMean: NaN }), record(2, 1, 0), loop)
    expect(c).toMatchObject({ verdict: 'better', iaeRatio: null, lostHoursWonPerWeek: { value: 168 } })
  })
  it('is repeatable by its seed, leaves its inputs alone and refuses wrong calls', () => {
    const before = record(1, 2, 0.4)
    const kept = before.error.slice()
    expect(compareWindows(before, record(2, 1, 0), loop)).toEqual(compareWindows(before, record(2, 1, 0), loop))
    expect(before.error).toEqual(kept)
    expect(() => compareWindows(before, before, { ...loop, pvSpan: 0 })).toThrow(/spans/)
    expect(() => compareWindows(before, { ...before, binS: 300 }, loop)).toThrow(/bins/)
  })
})
