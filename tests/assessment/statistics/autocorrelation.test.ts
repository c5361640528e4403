import { describe, expect, it } from 'vitest'
import { autocorrelation } from '../../../shared/assessment/statistics/autocorrelation'
import { autocovariance } from '../../../shared/assessment/statistics/autocovariance'
import { largestDifference, referenceCases, referenceFile, signal } from './reference'

describe('autocorrelation', () => {
  // R stats::acf; to lag 3,000 of 20,000 samples, so that the block transforms are held to it too (R adds one product
  // after the other: its own rounding is of the order n times 1e-16 at worst)
  it.each<{ csv: string, maxLag: number, lags: number[], r: number[] }>(referenceFile('r-correlation').autocorrelation)('equals R acf of $csv to lag $maxLag', ({ csv, maxLag, lags, r }) => {
    const ours = autocorrelation(signal(csv), maxLag)
    expect(largestDifference(lags.map(k => ours[k]), r)).toBeLessThan(1e-13)
  })
  it.each(['lh', 'log10lynx', 'sunspot.year', 'LakeHuron'])('equals R acf of %s, and its covariance at lag 0', (name) => {
    const { inputs, expected } = referenceCases('autoregression').get(`${name}/acf`)
    expect(largestDifference(autocorrelation(signal(inputs.csv), 20), expected.acf)).toBeLessThan(2e-14)
    expect(autocovariance(signal(inputs.csv), 0)[0] / expected.c0).toBeCloseTo(1, 13)
  })
  it('is cos(k w) (1 - k/n) for whole periods of a sine, up to the end terms', () => {
    const n = 20000
    const x = Float64Array.from({ length: n }, (_, t) => Math.sin(2 * Math.PI * t / 50))
    const r = autocorrelation(x, 1000)
    // at whole periods the end terms vanish: sum over n - k samples of sin^2
    for (let k = 0; k <= 1000; k += 50) expect(r[k]).toBeCloseTo(1 - k / n, 12)
    for (let k = 25; k <= 1000; k += 50) expect(r[k]).toBeCloseTo(-(1 - k / n), 12)
  })
  it('does not change under shift, scale and time reversal', () => {
    const x = signal('signals/bic_qpc.csv')
    const r = autocorrelation(x, 300)
    expect(largestDifference(autocorrelation(x.map(v => 1000 - 5 * v), 300), r)).toBeLessThan(1e-12)
    expect(largestDifference(autocorrelation(x.slice().reverse(), 300), r)).toBeLessThan(1e-14)
  })
  it('is NaN at every lag for a constant record, even one whose mean rounds', () => {
    expect([...autocorrelation(new Float64Array(1000).fill(0.1), 3)]).toEqual([NaN, NaN, NaN, NaN])
    expect([...autocovariance(new Float64Array(1000).fill(0.1), 100)].every(v => v === 0)).toBe(true)
  })
  it('refuses what it cannot do', () => {
    expect(() => autocorrelation(Float64Array.of(1, NaN, 2), 1)).toThrow('x[1] must be a finite number, got NaN')
    expect(() => autocorrelation(Float64Array.of(1, Infinity, 2), 1)).toThrow('x[1]')
    expect(() => autocorrelation(Float64Array.of(1, 2), 2)).toThrow('maxLag')
    expect(() => autocorrelation(new Float64Array(0), 0)).toThrow()
  })
  it('leaves its input alone', () => {
    const x = signal('signals/R_lh.csv')
    const before = x.slice()
    autocorrelation(x, 47)
    expect(x).toEqual(before)
  })
})
