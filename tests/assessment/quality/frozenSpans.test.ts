import { describe, expect, it } from 'vitest'
import { frozenSpans } from '../../../shared/assessment/quality/frozenSpans'

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
