import { describe, expect, it } from 'vitest'
import { frozenSpans } from '../../../shared/assessment/quality/frozenSpans'
import { outOfRange } from '../../../shared/assessment/quality/outOfRange'
import { spikes } from '../../../shared/assessment/quality/spikes'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'

// Common practice, no source: constructed cases whose answer follows from the definition.

const n = 200
const t = Float64Array.from({ length: n }, (_, i) => i * 10_000)
const moving = () => Float64Array.from({ length: n }, (_, i) => 50 + i % 7)
const frozen = (from: number, to: number) => moving().fill(42, from, to)
const options = { horizonS: 300, opSpan: 100 }

describe('frozenSpans', () => {
  it('finds a PV that stands while the output moves by more than 2 % of its span', () => {
    expect(frozenSpans(t, frozen(50, 120), moving(), null, options)).toEqual([{ from: 50, to: 120 }])
  })
  it('or while the set point moves', () => {
    const sp = new Float64Array(n).fill(50).fill(51, 80)
    expect(frozenSpans(t, frozen(50, 120), null, sp, options)).toEqual([{ from: 50, to: 120 }])
    expect(frozenSpans(t, frozen(90, 130), null, sp, options)).toEqual([])
  })
  it('leaves a loop at rest alone, and an output within 2 %', () => {
    const rest = new Float64Array(n).fill(42)
    expect(frozenSpans(t, rest, rest, rest, options)).toEqual([])
    expect(frozenSpans(t, rest, Float64Array.from({ length: n }, (_, i) => 50 + 2 * (i % 2)), null, options)).toEqual([])
    expect(frozenSpans(t, rest, null, null, options)).toEqual([])
  })
  it('needs more than the horizon, by the clock', () => {
    // 31 samples last 300 s from the first to the last
    expect(frozenSpans(t, frozen(50, 81), moving(), null, options)).toEqual([])
    expect(frozenSpans(t, frozen(50, 82), moving(), null, options)).toEqual([{ from: 50, to: 82 }])
    expect(frozenSpans(t.map(v => v / 10), frozen(50, 120), moving(), null, options)).toEqual([])
  })
  it('is ended by a missing PV; a missing output says nothing', () => {
    const pv = frozen(50, 120)
    pv[85] = NaN
    expect(frozenSpans(t, pv, moving(), null, options)).toEqual([{ from: 50, to: 85 }, { from: 86, to: 120 }])
    expect(frozenSpans(t, frozen(50, 120), new Float64Array(n).fill(NaN), null, options)).toEqual([])
    expect(frozenSpans(t, new Float64Array(n).fill(NaN), moving(), null, options)).toEqual([])
  })
  it('takes an empty record, refuses unequal ones', () => {
    expect(frozenSpans(new Float64Array(0), new Float64Array(0), null, null, options)).toEqual([])
    expect(() => frozenSpans(t, new Float64Array(3), null, null, options)).toThrow('got 200, 3')
    expect(() => frozenSpans(t, t, null, null, { horizonS: 0, opSpan: 100 })).toThrow('horizonS')
  })
})

describe('spikes', () => {
  const noise = () => {
    const g = seededRandom(8)
    return Float64Array.from({ length: 5000 }, () => 20 + g.normal())
  }
  it('finds single and double samples that stand out by 20 deviations', () => {
    const x = noise()
    for (const i of [400, 1500, 1501, 4000]) x[i] = i === 4000 ? 0 : 40
    expect([...spikes(x)]).toEqual([400, 1500, 1501, 4000])
  })
  it('finds none in noise, on a step, a ramp, a sine or a constant', () => {
    expect([...spikes(noise())]).toEqual([])
    expect([...spikes(noise().map((v, i) => i < 2500 ? v : v + 30))]).toEqual([])
    expect([...spikes(Float64Array.from({ length: 500 }, (_, i) => i))]).toEqual([])
    expect([...spikes(Float64Array.from({ length: 500 }, (_, i) => Math.sin(i / 5)))]).toEqual([])
    expect([...spikes(new Float64Array(100).fill(3))]).toEqual([])
  })
  it('does not call changes of a few quantisation steps spikes', () => {
    const x = new Float64Array(100).fill(3)
    x[50] = 3.3
    expect([...spikes(x, { quantum: 0.1 })]).toEqual([])
    expect([...spikes(x, { quantum: 0.01 })]).toEqual([50])
  })
  it('does not call the changes of a record that mostly stands still spikes', () => {
    const g = seededRandom(6)
    // holds its value, leaves it for one sample by an ordinary amount, in every fifth sample
    const x = Float64Array.from({ length: 2000 }, (_, i) => i % 5 === 0 ? 50 + g.normal() : 50)
    expect(spikes(x).length).toBeLessThan(5)
    x[1001] = 90
    expect([...spikes(x)]).toContain(1001)
  })
  it('moves with offset and scale, and backwards', () => {
    const x = noise()
    x[1000] = 40
    expect([...spikes(x.map(v => 7 - 3 * v))]).toEqual([1000])
    expect([...spikes(x.slice().reverse())]).toEqual([3999])
  })
  it('judges nothing beside missing samples and leaves its input alone', () => {
    const x = noise()
    x[1000] = 40
    x[1002] = NaN
    const before = x.slice()
    expect([...spikes(x)]).toEqual([])
    expect(x).toEqual(before)
    expect([...spikes(new Float64Array(0))]).toEqual([])
    expect(() => spikes(x, { threshold: 0 })).toThrow('threshold')
  })
})

describe('outOfRange', () => {
  it('marks what lies beyond the range by more than 5 % of the span', () => {
    expect([...outOfRange(Float64Array.of(-5, -5.1, 0, 105, 105.1, NaN, Infinity), { low: 0, high: 100 })]).toEqual([0, 1, 0, 0, 1, 0, 1])
    expect([...outOfRange(Float64Array.of(-0.1, 0, 100.1), { low: 0, high: 100, marginFraction: 0 })]).toEqual([1, 0, 1])
  })
  it('refuses an empty range', () => {
    expect(() => outOfRange(Float64Array.of(1), { low: 5, high: 5 })).toThrow('low < high')
  })
})
