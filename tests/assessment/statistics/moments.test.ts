import { describe, expect, it } from 'vitest'
import { autocorrelation } from '../../../shared/assessment/statistics/autocorrelation'
import { mean } from '../../../shared/assessment/statistics/mean'
import { variance } from '../../../shared/assessment/statistics/variance'
import { referenceCases, signal } from './reference'

describe('mean, variance and lag-1 autocorrelation against NIST StRD certified values', () => {
  // NIST Statistical Reference Datasets, univariate summary statistics
  it.each([...referenceCases('nist')])('%s', (name, { inputs, expected }) => {
    const x = signal(inputs.csv)
    // the decimal inputs of NumAcc3 and 4 are no binary numbers: their certified spread cannot be met more closely
    const relative = ({ NumAcc3: 2e-9, NumAcc4: 2e-8, Mavro: 1e-12, Michelso: 1e-12, NumAcc2: 1e-13 } as Record<string, number>)[name] ?? 1e-13
    expect(Math.abs(mean(x) / expected.certified_mean - 1)).toBeLessThan(1e-14)
    expect(Math.abs(Math.sqrt(variance(x)) / expected.certified_sd - 1)).toBeLessThan(relative)
    expect(Math.abs(autocorrelation(x, 1)[1] / expected.certified_lag1 - 1)).toBeLessThan(relative)
  })
})

describe('mean and variance', () => {
  it('shift and scale as they must', () => {
    const x = signal('signals/R_lh.csv')
    expect(mean(x.map(v => 3 * v - 7))).toBeCloseTo(3 * mean(x) - 7, 13)
    expect(variance(x.map(v => 3 * v - 7))).toBeCloseTo(9 * variance(x), 13)
    expect(variance(x, 0)).toBeCloseTo(variance(x) * 47 / 48, 14)
  })
  it('give 0 spread for a constant, NaN for a NaN', () => {
    expect(variance(new Float64Array(1000).fill(0.1))).toBe(0)
    expect(mean(Float64Array.of(1, NaN))).toBeNaN()
    expect(variance(Float64Array.of(1, NaN))).toBeNaN()
  })
  it('refuse too short records', () => {
    expect(() => mean(new Float64Array(0))).toThrow('at least 1 value')
    expect(() => variance(Float64Array.of(1))).toThrow('more than 1 values, got 1')
    expect(variance(Float64Array.of(1), 0)).toBe(0)
  })
})
