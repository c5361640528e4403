import { describe, expect, it } from 'vitest'
import { buildLedger, mergeSpans } from '../../../shared/assessment/ledger/buildLedger'
import { hoursOfRibbon, ribbonOf, stateOfLetter } from '../../../shared/assessment/ledger/ribbon'
import { FROZEN, prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { LEDGER_STATES, LOST_STATES, type LoopRecord, type LoopSetup, type TimeSpan } from '../../../shared/assessment/types'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from '../records'

// The answers here follow from the definition of the ledger alone, hour by hour, on records made by hand.
const week = weekFrame('2026-W48', 'UTC')
const start = week.hourEdges[0]
const HOUR = 3_600_000
const span = (fromHour: number, toHour: number): TimeSpan => ({ fromMs: start + fromHour * HOUR, toMs: start + toHour * HOUR })

function ledger(record: LoopRecord, options: { setup?: LoopSetup, hunting?: TimeSpan[], outages?: TimeSpan[], frozen?: [number, number], frame?: typeof week } = {}) {
  const setup = options.setup ?? makeSetup()
  const frame = options.frame ?? week
  const prepared = prepareRecord(record, setup, frame)
  if (options.frozen) for (let i = options.frozen[0]; i < options.frozen[1]; i++) prepared.flags[i] |= FROZEN
  return buildLedger(prepared, setup.tolerance, frame, options.hunting ?? [], options.outages ?? [])
}
/** `steps` samples an hour, 4 hours unless said otherwise. */
const regular = (change: Partial<Parameters<typeof makeRecord>[0]> = {}) => makeRecord({ fromMs: start, intervalS: 10, n: 4 * 360, pv: () => 50, ...change })
const first = (ribbon: string, n = 4) => ribbon.slice(0, n)
const hourOf = (i: number) => Math.floor(i / 360)

describe('the week ledger', () => {
  it('gives each of the 168 hours one state', () => {
    const l = ledger(regular())
    expect(l.ribbon).toBe(`ssss${'.'.repeat(164)}`)
    expect(l.hours).toEqual({ noData: 164, down: 0, sensor: 0, manual: 0, saturated: 0, hunting: 0, offTarget: 0, steady: 4 })
    expect(l.lostHours).toBe(0)
  })

  it('needs half of an hour: 180 of 360 samples are enough, 179 are not', () => {
    expect(first(ledger(regular({ skip: i => hourOf(i) === 1 && i % 360 >= 180 })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ skip: i => hourOf(i) === 1 && i % 360 >= 179 })).ribbon)).toBe('s.ss')
  })

  it('counts manual above half of an hour, not at half', () => {
    const mode = (limit: number) => (i: number) => hourOf(i) === 2 && i % 360 < limit ? 'MAN' : 'AUTO'
    expect(first(ledger(regular({ mode: mode(180) })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ mode: mode(181) })).ribbon)).toBe('ssms')
  })

  it('takes any of the normal modes, whatever their letters, and an unknown mode as normal', () => {
    expect(first(ledger(regular({ mode: () => 'CAS' })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ mode: () => 'CAS' }), { setup: makeSetup('flow', { normalModes: ['auto'] }) }).ribbon)).toBe('mmmm')
    expect(first(ledger(regular({ mode: i => hourOf(i) === 0 ? null : 'AUTO' })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ mode: null })).ribbon)).toBe('ssss')
  })

  it('sees OP at a limit within 0.5 % of span, in runs of three samples', () => {
    expect(first(ledger(regular({ op: i => hourOf(i) === 1 ? 99.5 : 40 })).ribbon)).toBe('suss')
    expect(first(ledger(regular({ op: i => hourOf(i) === 1 ? 99.4 : 40 })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ op: i => hourOf(i) === 1 ? -0.3 : 40 })).ribbon)).toBe('suss')
    // two of every three samples at the limit is more than half of the hour, but no run of three
    expect(first(ledger(regular({ op: i => i % 3 === 0 ? 40 : 100 })).ribbon)).toBe('ssss')
    expect(first(ledger(regular({ op: i => i % 4 === 0 ? 40 : 100 })).ribbon)).toBe('uuuu')
    expect(first(ledger(regular({ op: () => 100 }), { setup: makeSetup('temperature', { form: 'onOff' }) }).ribbon)).toBe('ssss')
  })

  it('calls an hour off target when its mean absolute error is above the tolerance, not at it', () => {
    expect(first(ledger(regular({ pv: i => hourOf(i) === 3 ? 51.01 : 51 })).ribbon)).toBe('ssso')
    // equal positive and negative errors do not cancel
    expect(first(ledger(regular({ pv: i => i % 2 ? 52 : 48 })).ribbon)).toBe('oooo')
    // mean absolute error: half of the hour at 0, half at 1.9 is 0.95
    expect(first(ledger(regular({ pv: i => i % 360 < 180 ? 50 : 51.9 })).ribbon)).toBe('ssss')
  })

  it('cannot be off target without SP', () => {
    expect(first(ledger(regular({ sp: null, pv: () => 90 })).ribbon)).toBe('ssss')
  })

  it('tells a bad PV, while the loop answers, from no data', () => {
    expect(first(ledger(regular({ pv: i => hourOf(i) === 1 ? NaN : 50 })).ribbon)).toBe('sxss')
    expect(first(ledger(regular({ pv: i => hourOf(i) === 1 ? NaN : 50, sp: i => hourOf(i) === 1 ? NaN : 50, op: i => hourOf(i) === 1 ? NaN : 40 })).ribbon)).toBe('s.ss')
    expect(first(ledger(regular({ pv: i => hourOf(i) === 1 ? NaN : 50, sp: null, op: null })).ribbon)).toBe('s.ss')
  })

  it('sees PV out of range beyond 5 % of span, and frozen PV', () => {
    expect(first(ledger(regular({ pv: i => hourOf(i) === 1 ? 105.1 : 50 })).ribbon)).toBe('sxss')
    expect(first(ledger(regular({ pv: i => hourOf(i) === 1 ? 104.9 : 50 })).ribbon)).toBe('soss')
    expect(first(ledger(regular(), { frozen: [360, 360 + 181] }).ribbon)).toBe('sxss')
    expect(first(ledger(regular(), { frozen: [360, 360 + 180] }).ribbon)).toBe('ssss')
  })

  it('takes hunting from the detected spans, above half of an hour, overlaps counted once', () => {
    expect(first(ledger(regular(), { hunting: [span(0.5, 2.51)] }).ribbon)).toBe('shhs')
    expect(first(ledger(regular(), { hunting: [span(1, 1.4), span(1.1, 1.5)] }).ribbon)).toBe('ssss')
    expect(first(ledger(regular(), { hunting: [span(1, 1.4), span(1.5, 1.7)] }).ribbon)).toBe('shss')
  })

  it('lets the first state that applies win, all along the order', () => {
    const everything = { hunting: [span(0, 4)], outages: [span(0, 4)] }
    const bad = regular({ pv: () => 200, op: () => 100, mode: () => 'MAN' })
    expect(first(ledger(bad, { ...everything, outages: [span(0, 4)] }).ribbon)).toBe('dddd')
    expect(first(ledger({ ...bad, t: bad.t.slice(0, 1), pv: bad.pv.slice(0, 1), sp: bad.sp!.slice(0, 1), op: bad.op!.slice(0, 1), mode: bad.mode!.slice(0, 1) }, everything).ribbon)).toBe('....')
    expect(first(ledger(bad, { hunting: [span(0, 4)] }).ribbon)).toBe('xxxx')
    const inRange = { op: () => 100, pv: () => 60 }
    expect(first(ledger(regular({ ...inRange, mode: () => 'MAN' }), { hunting: [span(0, 4)] }).ribbon)).toBe('mmmm')
    expect(first(ledger(regular(inRange), { hunting: [span(0, 4)] }).ribbon)).toBe('uuuu')
    expect(first(ledger(regular({ pv: () => 60 }), { hunting: [span(0, 4)] }).ribbon)).toBe('hhhh')
    expect(first(ledger(regular({ pv: () => 60 })).ribbon)).toBe('oooo')
  })

  it('puts declared outages after missing data', () => {
    expect(first(ledger(regular({ skip: i => hourOf(i) === 0 }), { outages: [span(0, 2)] }).ribbon)).toBe('.dss')
    expect(first(ledger(regular(), { outages: [span(0.5, 1.4)] }).ribbon)).toBe('ssss')
  })

  it('adds up: hours to the week, lost hours to the lost states, letters to both', () => {
    const l = ledger(regular({ n: 20 * 360, pv: i => hourOf(i) % 3 ? 50 : 60, mode: i => hourOf(i) % 5 ? 'AUTO' : 'MAN', op: i => hourOf(i) % 7 ? 40 : 100 }), { hunting: [span(3, 9)] })
    expect(Object.values(l.hours).reduce((a, b) => a + b, 0)).toBe(168)
    expect(l.lostHours).toBe(LOST_STATES.reduce((s, k) => s + l.hours[k], 0))
    expect(hoursOfRibbon(l.ribbon)).toEqual(l.hours)
  })

  it('has 167 and 169 letters when the clocks change, and the local hours stay in place', () => {
    for (const [id, hours] of [['2026-W13', 167], ['2026-W43', 169]] as const) {
      const frame = weekFrame(id, 'Europe/Berlin')
      const record = makeRecord({ fromMs: frame.hourEdges[0], intervalS: 60, n: hours * 60, pv: i => i >= (hours - 1) * 60 ? 60 : 50 })
      expect(ledger(record, { frame }).ribbon).toBe(`${'s'.repeat(hours - 1)}o`)
    }
  })

  it('begins mid-record and ends mid-record: what lies outside the week does not count', () => {
    const record = makeRecord({ fromMs: start - 100 * HOUR, intervalS: 60, n: 400 * 60, pv: i => i < 100 * 60 || i >= 268 * 60 ? 60 : 50 })
    expect(ledger(record).ribbon).toBe('s'.repeat(168))
  })

  it.each([[0.1, 2], [1, 4], [10, 12], [60, 168], [420, 168], [900, 168]])('is the same at %s s between samples', (intervalS, hours) => {
    const n = Math.floor(hours * 3600 / intervalS)
    const record = makeRecord({ fromMs: start, intervalS, n, pv: i => Math.floor(i * intervalS / 3600) === 1 ? 60 : 50 })
    expect(first(ledger(record).ribbon, 2)).toBe('so')
    expect(ledger(record).hours.steady).toBe(Math.floor(n * intervalS / 3600) - 1)
  })

  it('splits a sample over the edge of an hour', () => {
    // 40-minute samples: the second one, off target, lies 20 minutes in each of the first two hours
    const record = makeRecord({ fromMs: start, intervalS: 2400, n: 3, pv: i => i === 1 ? 52.9 : 50 })
    // mean absolute error 20/60 x 2.9 = 0.97 in both
    expect(first(ledger(record).ribbon, 2)).toBe('ss')
    const more = makeRecord({ fromMs: start, intervalS: 2400, n: 3, pv: i => i === 1 ? 53.1 : 50 })
    expect(first(ledger(more).ribbon, 2)).toBe('oo')
  })

  it('takes jittering time stamps for what they are', () => {
    const record = regular()
    const t = record.t.map((x, i) => x + (i % 2 ? 1500 : -1500) * (i > 0 ? 1 : 0))
    expect(first(ledger({ ...record, t }).ribbon)).toBe('ssss')
  })

  it('is all noData without a sample in the week', () => {
    expect(ledger(makeRecord({ fromMs: start - 10 * HOUR, intervalS: 60, n: 60, pv: () => 50 })).ribbon).toBe('.'.repeat(168))
  })

  it('leaves its inputs alone', () => {
    const record = regular({ pv: i => i === 5 ? 500 : 50 })
    const copy = structuredClone(record)
    const hunting = [span(1, 2), span(0, 1.5)]
    ledger(record, { hunting })
    expect(record).toEqual(copy)
    expect(hunting).toEqual([span(1, 2), span(0, 1.5)])
  })
})

describe('the ribbon', () => {
  it('writes the letters of the public interface', () => {
    expect(ribbonOf(Uint8Array.from(LEDGER_STATES, (_, i) => i))).toBe('.dxmuhos')
    expect([...'.dxmuhos'].map(stateOfLetter)).toEqual([...LEDGER_STATES])
  })
  it('refuses what is no state', () => {
    expect(() => ribbonOf(Uint8Array.of(8))).toThrow(RangeError)
    expect(() => stateOfLetter('q')).toThrow(/"q"/)
  })
})

describe('spans', () => {
  it('merge into their union', () => {
    expect(mergeSpans([span(3, 4), span(0, 2), span(1, 2.5), span(5, 5)])).toEqual([span(0, 2.5), span(3, 4)])
  })
})
