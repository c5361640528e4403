import { describe, expect, it } from 'vitest'
import { isInsufficient } from '../../../shared/assessment/types'
import { compressionFactor } from '../../../shared/assessment/quality/compressionFactor'
import { quantisationStep } from '../../../shared/assessment/quality/quantisationStep'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { referenceCases, signal } from '../statistics/reference'

const cases = [...referenceCases('compression')]
const told = (x: Float64Array, quantum: number) => {
  const c = compressionFactor(x, quantum)
  if (isInsufficient(c)) throw new Error(c.reason)
  return c
}

describe('compressionFactor', () => {
  // records thinned by a known factor and drawn again with straight lines (numpy, R)
  it.each(cases.filter(([id]) => !id.startsWith('quant')))('%s: counts as the reference, and finds the true factor on values of 3 decimals', (_, { inputs, expected }) => {
    const x = signal(inputs.csv)
    const exact = told(x, 0)
    expect([exact.samples, exact.zeroSecondDifferences]).toEqual([expected.N, expected.zero_second_differences])
    expect(exact.factor).toBeCloseTo(expected.CF, 12)
    const rounded = x.map(v => Math.round(v * 1000) / 1000)
    expect(quantisationStep(rounded).step).toBeCloseTo(0.001, 9)
    const found = told(rounded, quantisationStep(rounded).step).factor
    expect(found).toBeCloseTo(expected.CF_when_rounded_3_decimals_tol_2quanta, 9)
    // one knot more or less of 401 lies within two quanta of its line
    if (expected.true_CF) expect(Math.abs(found / expected.true_CF - 1)).toBeLessThan(0.003)
  })
  it('counts repeats separately: 5 for a hold of 5 samples, 1 for a record without repeats', () => {
    const held = told(signal('signals/comp_hold5.csv'), 0)
    expect(held.repeatFactor).toBe(5)
    expect(held.factor).toBeCloseTo(2.5, 12)
    expect(told(signal('signals/comp_every3.csv'), 0).repeatFactor).toBe(1)
  })
  it('does not depend on offset and scale', () => {
    const x = signal('signals/comp_every3.csv')
    expect(told(x.map(v => 300 - 7 * v), 0).zeroSecondDifferences).toBe(told(x, 0).zeroSecondDifferences)
  })
  it('cannot tell where rounding alone makes second differences vanish', () => {
    const g = seededRandom(11)
    // noise of one quantum, and a slow signal seen through a coarse converter: neither was thinned
    expect(compressionFactor(Float64Array.from({ length: 2000 }, () => Math.round(g.normal())), 1)).toMatchObject({ status: 'insufficient' })
    expect(compressionFactor(Float64Array.from({ length: 2000 }, (_, t) => Math.round(20 * Math.sin(t / 60))), 1)).toMatchObject({ status: 'insufficient' })
  })
  it('says so on a short or constant record', () => {
    expect(compressionFactor(new Float64Array(5), 0)).toEqual({ status: 'insufficient', reason: '5 samples, at least 20 are needed' })
    expect(compressionFactor(new Float64Array(50).fill(0.1), 0)).toEqual({ status: 'insufficient', reason: 'the record does not change' })
  })
  it('forms no difference across missing samples', () => {
    const x = signal('signals/comp_raw.csv')
    x[100] = NaN
    expect(told(x, 0)).toMatchObject({ samples: 1199, zeroSecondDifferences: 0, repeats: 0 })
  })
  it('refuses a negative quantum', () => {
    expect(() => compressionFactor(new Float64Array(50), -1)).toThrow('got -1')
  })
})

describe('quantisationStep', () => {
  it.each(cases.filter(([id]) => id.startsWith('quant')))('%s: finds the step and its ratio to the spread', (_, { inputs, expected }) => {
    const { step, factor } = quantisationStep(signal(inputs.csv))
    expect(step).toBeCloseTo(inputs.q, 10)
    expect(factor).toBeCloseTo(expected.QF, 10)
  })
  it('finds a step of a converter that is no decimal, and one that never shows singly', () => {
    const g = seededRandom(5)
    const converter = 4095
    expect(quantisationStep(Float64Array.from({ length: 3000 }, () => Math.round(2000 + 50 * g.normal()) * 150 / converter)).step).toBeCloseTo(150 / converter, 9)
    // changes of 2 and 3 steps only
    expect(quantisationStep(Float64Array.of(0, 2, 5, 3, 0, 3, 1, 4, 2, 5)).step).toBeCloseTo(1, 12)
  })
  it('sees none in values off any grid, or in a constant', () => {
    expect(quantisationStep(signal('signals/comp_raw.csv')).step).toBe(0)
    expect(quantisationStep(new Float64Array(50).fill(0.3))).toEqual({ step: 0, factor: NaN })
    expect(quantisationStep(new Float64Array(0))).toEqual({ step: 0, factor: NaN })
  })
  it('looks past missing samples', () => {
    expect(quantisationStep(Float64Array.of(1, NaN, 1.5, 2.5, NaN, 2)).step).toBeCloseTo(0.5, 12)
  })
})
