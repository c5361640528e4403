import { describe, expect, it } from 'vitest'
import { assessLoopWeek, METHOD_VERSION } from '../../shared/assessment/assessLoopWeek'
import { seededRandom } from '../../shared/assessment/statistics/seededRandom'
import { LOST_STATES, VERDICTS, type LoopRecord, type LoopSetup, type LoopWeekAssessment, type MeasureKey } from '../../shared/assessment/types'
import { weekFrame } from '../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from './records'

const week = weekFrame('2026-W48', 'UTC')
const start = week.hourEdges[0]
const assess = (record: LoopRecord, setup: LoopSetup = makeSetup(), outages = [] as { fromMs: number, toMs: number }[]) => assessLoopWeek(record, setup, week, outages)

/** Quiet loop: PV is AR(1) noise of 0.2 about the set point, OP wanders a little. */
function quiet(change: Partial<Parameters<typeof makeRecord>[0]> = {}, seed = 3) {
  const random = seededRandom(seed)
  const n = change.n ?? 2 * 8640
  const pv = new Float64Array(n)
  const op = new Float64Array(n)
  let y = 0
  for (let i = 0; i < n; i++) {
    y = 0.8 * y + 0.12 * random.normal()
    pv[i] = 50 + y
    op[i] = 40 - 0.5 * y + 0.05 * random.normal()
  }
  return makeRecord({ fromMs: start, intervalS: 10, n, pv: i => pv[i], op: i => op[i], mode: () => 'AUTO', ...change })
}

/** Whole contract: each figure is there with its explanation, or withheld with a reason; no NaN; hours and letters agree. */
function expectWhole(a: LoopWeekAssessment, hours = 168) {
  expect(a.ribbon).toHaveLength(hours)
  expect(Object.values(a.hours).reduce((x, y) => x + y, 0)).toBe(hours)
  expect(a.lostHours).toBe(LOST_STATES.reduce((s, k) => s + a.hours[k], 0))
  for (const [key, value] of Object.entries(a.measures) as [MeasureKey, number | null][]) {
    const explained = a.explanations.filter(e => e.measure === key)
    const withheld = a.withheld.filter(w => w.measure === key)
    expect([key, explained.length, withheld.length]).toEqual([key, value === null ? 0 : 1, value === null ? 1 : 0])
    for (const w of withheld) expect(w.reason).toMatch(/^[A-Z0-9].*\.$/)
    for (const e of explained) {
      expect(e.method.length).toBeGreaterThan(10)
      expect(e.window.toMs).toBeGreaterThanOrEqual(e.window.fromMs)
    }
  }
  expect(VERDICTS).toContain(a.verdict)
  expect(a.confidence).toBeGreaterThan(0)
  expect(a.confidence).toBeLessThanOrEqual(1)
  expect(a.verdictReason).toMatch(/\.$/)
  for (const text of Object.values(a.nextActions)) expect(text).toMatch(/^[A-Z].*\.$/)
  expect(JSON.parse(JSON.stringify(a))).toEqual(a)
}

describe('assessLoopWeek', () => {
  it('is whole for a quiet loop, and calls it steady', () => {
    const a = assess(quiet())
    expectWhole(a)
    expect(a.methodVersion).toBe(METHOD_VERSION)
    expect([a.hours.steady, a.lostHours]).toEqual([48, 0])
    expect(a.measures.coverage).toBeCloseTo(48 / 168, 12)
    expect(a.measures.serviceFactor).toBe(1)
    expect(a.measures.oscillationIndex).toBeNull()
    expect(a.verdict).toBe('steady')
    expect(a.rhythm!.lagS.length).toBeLessThanOrEqual(400)
    expect(a.rhythm!.periodS.length).toBeLessThanOrEqual(400)
  })

  it('finds a swing when it is there: period within 2 %, begin and end within a period', () => {
    // a sine of 600 s and amplitude 5 from hour 10 to hour 30, on noise
    const base = quiet()
    const pv = base.pv.map((x, i) => x + (i >= 3600 && i < 10_800 ? 5 * Math.sin(2 * Math.PI * i / 60) : 0))
    const a = assess({ ...base, pv })
    expectWhole(a)
    expect(a.measures.oscillationPeriod! / 600).toBeCloseTo(1, 1.7)
    expect(a.measures.oscillationAmplitude!).toBeCloseTo(5, 0)
    expect(a.measures.oscillationIndex!).toBeGreaterThan(1)
    expect(a.hours.hunting).toBe(20)
    expect(a.ribbon.slice(0, 32)).toBe(`${'s'.repeat(10)}${'h'.repeat(20)}ss`)
    const [episode] = a.oscillations[0].episodes
    expect(Math.abs(episode.fromMs - (start + 36_000_000))).toBeLessThan(600_000)
    expect(Math.abs(episode.toMs - (start + 108_000_000))).toBeLessThan(600_000)
    expect(a.pvOp!.op.length).toBeLessThanOrEqual(600)
    expect(a.pvOp!.op.length).toBe(a.pvOp!.pv.length)
  })

  it('puts the episode right across a long gap', () => {
    const base = quiet({ n: 3 * 8640, skip: i => i >= 5000 && i < 12_000 })
    const pv = base.pv.map((x, i) => { const k = (base.t[i] - start) / 10_000; return x + (k >= 14_000 && k < 20_000 ? 5 * Math.sin(2 * Math.PI * k / 60) : 0) })
    const a = assess({ ...base, pv })
    const [episode] = a.oscillations[0].episodes
    expect(Math.abs(episode.fromMs - (start + 140_000_000))).toBeLessThan(600_000)
    expect(Math.abs(episode.toMs - (start + 200_000_000))).toBeLessThan(600_000)
  })

  it('says what a missing signal takes away, and goes on with the rest', () => {
    const withoutSp = assess(quiet({ sp: null }))
    expectWhole(withoutSp)
    expect([withoutSp.measures.iaePerHour, withoutSp.measures.offset, withoutSp.measures.timeInTolerance]).toEqual([null, null, null])
    expect(withoutSp.withheld.find(w => w.measure === 'iaePerHour')!.reason).toMatch(/no SP/)
    expect(withoutSp.measures.standardDeviation).toBeGreaterThan(0)
    const withoutOp = assess(quiet({ op: null }))
    expectWhole(withoutOp)
    expect(withoutOp.withheld.find(w => w.measure === 'valveTravelPerDay')!.reason).toMatch(/no OP/)
    expect(withoutOp.valveTests.every(t => t.says === 'withheld' && /no OP/.test(t.note))).toBe(true)
    const withoutMode = assess(quiet({ mode: null }))
    expectWhole(withoutMode)
    expect(withoutMode.measures.serviceFactor).toBeNull()
    expect(withoutMode.withheld.find(w => w.measure === 'serviceFactor')!.reason).toMatch(/no MODE/)
  })

  it('stands an empty week, one sample, and a record of nothing but gaps', () => {
    for (const record of [quiet({ n: 0 }), quiet({ n: 1 }), quiet({ n: 2 }), quiet({ n: 400, pv: () => NaN, sp: () => NaN, op: () => NaN }), quiet({ n: 400, pv: () => 50, op: () => 40 })]) {
      const a = assess(record)
      expectWhole(a)
    }
    const empty = assess(quiet({ n: 0 }))
    expect([empty.verdict, empty.ribbon]).toEqual(['cannotTell', '.'.repeat(168)])
    expect(empty.verdictReason).toBe('There is no sample in this week.')
  })

  it.each([0.1, 1, 60, 300, 900])('runs at %s s between samples', (intervalS) => {
    const n = Math.min(40_000, Math.floor(7 * 86_400 / intervalS))
    const a = assess(quiet({ n, intervalS }))
    expectWhole(a)
    expect(a.measures.coverage).toBeCloseTo(n * intervalS / 604_800, 9)
  })

  it('has 167 and 169 letters in the weeks of the clock change', () => {
    for (const [id, hours] of [['2026-W13', 167], ['2026-W43', 169]] as const) {
      const frame = weekFrame(id, 'Europe/Berlin')
      expectWhole(assessLoopWeek(quiet({ fromMs: frame.hourEdges[0], n: hours * 60, intervalS: 60 }), makeSetup(), frame, []), hours)
    }
  })

  it('lets counted hours speak first: manual, limit, dead sensor', () => {
    const mostly = (i: number) => i > 5000
    const manual = assess(quiet({ mode: i => mostly(i) ? 'MAN' : 'AUTO' }))
    expect([manual.verdict, manual.hours.manual]).toEqual(['manual', 34])
    expect(manual.verdictReason).toContain('34 h')
    const limit = assess(quiet({ op: i => mostly(i) ? 100 : 40 }))
    expect([limit.verdict, limit.hours.saturated]).toEqual(['saturated', 34])
    const dead = assess(quiet({ pv: i => mostly(i) ? NaN : 50 + 0.1 * Math.sin(i * 1.7) }))
    expect([dead.verdict, dead.hours.sensor]).toEqual(['sensor', 34])
    const frozen = assess(quiet({ pv: i => mostly(i) ? 50.25 : 50 + 0.1 * Math.sin(i * 1.7), op: i => 40 + 10 * Math.sin(i / 500) }))
    expect(frozen.verdict).toBe('sensor')
    expect(frozen.measures.frozenFraction!).toBeGreaterThan(0.6)
  })

  it('refuses a cause where the record is sampled too slowly or thinned by the historian', () => {
    const slow = assess(quiet({ pv: i => 50 + 3 * Math.sin(2 * Math.PI * i / 5.3), op: i => 40 + 2 * Math.sin(2 * Math.PI * i / 5.3 + 1) }))
    expectWhole(slow)
    expect(slow.verdict).toBe('cannotTell')
    expect(slow.verdictReason).toMatch(/5\.3 samples/)
    expect(slow.valveTests.every(t => t.says === 'withheld')).toBe(true)
    // every tenth sample kept, straight lines between
    const base = quiet()
    const pv = base.pv.map((_, i) => { const k = i - i % 10; const next = Math.min(k + 10, base.pv.length - 1); return base.pv[k] + (base.pv[next] - base.pv[k]) * (i % 10) / 10 })
    const thinned = assess({ ...base, pv })
    expectWhole(thinned)
    expect(thinned.measures.compressionFactor!).toBeGreaterThan(3)
    expect(thinned.measures.varianceRatio).toBeNull()
    expect(thinned.verdict).toBe('cannotTell')
    expect(thinned.verdictReason).toMatch(/thinned/)
  })

  it('judges an on-off loop by the size of its swing, and never accuses its valve', () => {
    const cycle = (swing: number) => quiet({ op: i => i % 120 < 40 ? 100 : 0, pv: i => 50 + swing * Math.sin(2 * Math.PI * i / 120) })
    const setup = makeSetup('temperature', { form: 'onOff', tolerance: 2, hysteresis: 1 })
    const narrow = assess(cycle(1), setup)
    expectWhole(narrow)
    expect([narrow.verdict, narrow.measures.onOffPeriodS, narrow.hours.saturated]).toEqual(['steady', 1200, 0])
    expect(narrow.measures.onOffDuty!).toBeCloseTo(1 / 3, 2)
    const wide = assess(cycle(6), setup)
    expect(wide.verdict).toBe('huntingTuning')
    expect(wide.valveTests.every(t => t.says === 'withheld')).toBe(true)
  })

  it('assesses a two-hour record on what it holds', () => {
    const random = seededRandom(5)
    const a = assess(quiet({ n: 720, pv: i => 50 + 4 * Math.sin(2 * Math.PI * i / 24) + 0.1 * random.normal(), op: i => 40 + 2 * Math.sin(2 * Math.PI * i / 24 + 2) }))
    expectWhole(a)
    expect(a.hours.hunting).toBe(2)
    expect(a.measures.oscillationPeriod!).toBeCloseTo(240, -1)
  })

  it('is the same again, and leaves its inputs alone', () => {
    const record = quiet({ n: 3000 })
    const setup = makeSetup()
    const copy = structuredClone(record)
    const one = assess(record, setup)
    expect(assess(record, setup)).toEqual(one)
    expect(record).toEqual(copy)
    expect(setup).toEqual(makeSetup())
  })

  it('does not change with the zero or the unit of the instrument', () => {
    const base = quiet({ n: 8640 })
    const pv = base.pv.map((x, i) => x + 3 * Math.sin(2 * Math.PI * i / 90))
    const one = assess({ ...base, pv })
    const scaled = assess({ ...base, pv: pv.map(x => 10 * x + 300), sp: base.sp!.map(x => 10 * x + 300) }, makeSetup('flow', { pvLow: 300, pvHigh: 1300, tolerance: 10 }))
    expect(scaled.ribbon).toBe(one.ribbon)
    expect(scaled.verdict).toBe(one.verdict)
    expect(scaled.measures.iaePercentSpan!).toBeCloseTo(one.measures.iaePercentSpan!, 9)
    expect(scaled.measures.oscillationPeriod!).toBeCloseTo(one.measures.oscillationPeriod!, 6)
    expect(scaled.measures.varianceRatio!).toBeCloseTo(one.measures.varianceRatio!, 6)
  })

  it('refuses a set-up that contradicts itself', () => {
    expect(() => assess(quiet({ n: 10 }), makeSetup('flow', { pvHigh: -5 }))).toThrow(/pvHigh/)
    expect(() => assess(quiet({ n: 10 }), makeSetup('flow', { settlingS: 0 }))).toThrow(/settlingS/)
  })
})
