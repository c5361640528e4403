import { describe, expect, it } from 'vitest'
import { analysisSeries } from '../../../shared/assessment/preparation/analysisSeries'
import { medianInterval } from '../../../shared/assessment/preparation/medianInterval'
import { AT_HIGH, AT_LOW, MODE_KNOWN, OFF_NORMAL, OUT_OF_RANGE, prepareRecord, RECEIVED } from '../../../shared/assessment/preparation/prepareRecord'
import { setpointActivity } from '../../../shared/assessment/preparation/setpointActivity'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from '../records'

const week = weekFrame('2026-W48', 'UTC')
const start = week.hourEdges[0]
const marked = (flags: Uint8Array, bit: number) => [...flags].flatMap((f, i) => f & bit ? [i] : [])

describe('medianInterval', () => {
  it('is the median, whatever a few gaps do', () => {
    expect(medianInterval(Float64Array.of(0, 10, 20, 30))).toBe(10)
    expect(medianInterval(Float64Array.of(0, 10, 20, 500, 510, 521))).toBe(10)
    expect(medianInterval(Float64Array.from({ length: 1001 }, (_, i) => i * 100 + (i % 2)))).toBeCloseTo(100, -1)
    expect(medianInterval(Float64Array.of(5))).toBeNaN()
  })
  it('refuses stamps that do not ascend', () => {
    expect(() => medianInterval(Float64Array.of(0, 10, 10))).toThrow(/sample 2/)
  })
})

describe('prepareRecord', () => {
  it('keeps a whole record as it is', () => {
    const record = makeRecord({ fromMs: start, intervalS: 10, n: 100, pv: i => i / 10 })
    const p = prepareRecord(record, makeSetup(), week)
    expect([p.intervalS, p.n, p.stretches, p.longGaps, p.missingSlots]).toEqual([10, 100, [{ begin: 0, end: 100 }], 0, 0])
    expect(Array.from(p.error!)).toEqual(Array.from(record.pv, x => 50 - x))
    expect(marked(p.flags, RECEIVED)).toHaveLength(100)
  })

  it('leaves short gaps empty and splits at long ones: 5 intervals are short, 6 are long', () => {
    const gap = (missing: number) => prepareRecord(makeRecord({ fromMs: start, intervalS: 10, n: 60, pv: () => 50, skip: i => i >= 20 && i < 20 + missing }), makeSetup(), week)
    const short = gap(4)
    expect([short.n, short.missingSlots, short.longGaps, short.stretches]).toEqual([60, 4, 0, [{ begin: 0, end: 60 }]])
    expect(short.t[22]).toBe(start + 220_000)
    expect(short.pv[22]).toBeNaN()
    expect(short.flags[22]).toBe(0)
    const long = gap(5)
    expect([long.n, long.missingSlots, long.longGaps, long.stretches]).toEqual([55, 0, 1, [{ begin: 0, end: 20 }, { begin: 20, end: 55 }]])
  })

  it('snaps jittering stamps to the grid', () => {
    const record = makeRecord({ fromMs: start, intervalS: 10, n: 50, pv: () => 50 })
    const p = prepareRecord({ ...record, t: record.t.map((t, i) => t + (i % 3) * 1200) }, makeSetup(), week)
    expect([p.n, p.missingSlots, p.longGaps]).toEqual([50, 0, 0])
  })

  it('marks modes, limits and range', () => {
    const p = prepareRecord(makeRecord({
      fromMs: start, intervalS: 10, n: 12,
      pv: i => i === 2 ? 105.01 : i === 3 ? -5.01 : i === 4 ? 105 : 50,
      mode: i => i < 2 ? 'MAN' : i === 5 ? null : 'CAS',
      op: i => i >= 4 && i < 7 ? 100 : i >= 9 && i < 11 ? 0 : 40,
    }), makeSetup(), week)
    expect(marked(p.flags, OUT_OF_RANGE)).toEqual([2, 3])
    expect([p.pv[2], p.pv[4], p.outOfRange]).toEqual([NaN, 105, 2])
    expect(marked(p.flags, OFF_NORMAL)).toEqual([0, 1])
    expect(marked(p.flags, MODE_KNOWN)).toEqual([0, 1, 2, 3, 4, 6, 7, 8, 9, 10, 11])
    expect(marked(p.flags, AT_HIGH)).toEqual([4, 5, 6])
    expect(marked(p.flags, AT_LOW)).toEqual([])
  })

  it('uses only what lies in the week', () => {
    const p = prepareRecord(makeRecord({ fromMs: start - 50_000, intervalS: 10, n: 100_000, pv: () => 50 }), makeSetup(), week)
    expect([p.t[0], p.n]).toEqual([start, 60_480])
  })

  it('stands an empty record and a single sample', () => {
    const empty = prepareRecord(makeRecord({ fromMs: start, intervalS: 10, n: 0, pv: () => 50 }), makeSetup(), week)
    expect([empty.n, empty.stretches]).toEqual([0, []])
    expect(prepareRecord(makeRecord({ fromMs: start, intervalS: 10, n: 1, pv: () => 50 }), makeSetup(), week).n).toBe(1)
  })

  it('refuses ranges without width', () => {
    const record = makeRecord({ fromMs: start, intervalS: 10, n: 3, pv: () => 50 })
    expect(() => prepareRecord(record, makeSetup('flow', { pvHigh: 0 }), week)).toThrow(/pvHigh must be above pvLow/)
    expect(() => prepareRecord(record, makeSetup('flow', { opHigh: 0 }), week)).toThrow(/opHigh must be above opLow/)
  })
})

describe('analysisSeries', () => {
  const prepared = (change: Partial<Parameters<typeof makeRecord>[0]> = {}) => prepareRecord(makeRecord({ fromMs: start, intervalS: 10, n: 600, pv: i => 50 + i, ...change }), makeSetup('flow', { pvHigh: 1000 }), week)

  it('averages down to settling / 30, never finer than native', () => {
    const s = analysisSeries(prepared(), 1800)
    expect([s.factor, s.intervalS, s.t.length]).toEqual([6, 60, 100])
    // mean of 50 .. 55
    expect(s.pv[0]).toBe(52.5)
    expect(s.error[0]).toBe(-2.5)
    expect(s.t[1]).toBe(start + 60_000)
    expect(analysisSeries(prepared(), 30).factor).toBe(1)
  })

  it('cuts at limits, manual and long gaps, and bridges short ones by a line', () => {
    const s = analysisSeries(prepared({ op: i => i >= 100 && i < 150 ? 100 : 40, mode: i => i >= 300 && i < 320 ? 'MAN' : 'AUTO', pv: i => i === 50 || i === 51 ? NaN : i, skip: i => i >= 400 && i < 430 }), 30)
    const inRecord = (k: number) => (s.t[k] - start) / 10_000
    expect(s.segments.map(g => [inRecord(g.begin), inRecord(g.end - 1)])).toEqual([[0, 99], [150, 299], [320, 399], [430, 599]])
    expect([s.pv[50], s.pv[51], s.bridged]).toEqual([50, 51, 2])
  })

  it('stands without SP and OP: the error is then the deviation from the mean', () => {
    const s = analysisSeries(prepared({ sp: null, op: null }), 30)
    expect([s.sp, s.op]).toEqual([null, null])
    expect(s.error.reduce((a, b) => a + b, 0)).toBeCloseTo(0, 6)
  })
})

describe('setpointActivity', () => {
  it('tells still, stepped, moving and absent', () => {
    expect(setpointActivity(null, 100).kind).toBe('absent')
    expect(setpointActivity(new Float64Array(50).fill(NaN), 100).kind).toBe('absent')
    expect(setpointActivity(new Float64Array(50).fill(7), 100).kind).toBe('still')
    expect(setpointActivity(Float64Array.from({ length: 50 }, (_, i) => i < 25 ? 7 : 8), 100)).toEqual({ kind: 'stepped', changedShare: 1 / 49, changes: 1 })
    expect(setpointActivity(Float64Array.from({ length: 50 }, (_, i) => Math.sin(i)), 100).kind).toBe('moving')
  })
})
