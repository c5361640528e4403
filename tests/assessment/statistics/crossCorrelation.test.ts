import { describe, expect, it } from 'vitest'
import { crossCorrelation } from '../../../shared/assessment/statistics/crossCorrelation'
import { largestDifference, referenceFile, signal } from './reference'

const reference = referenceFile('r-correlation')

describe('crossCorrelation', () => {
  // R stats::ccf on BJsales and BJsales.lead (Box, Jenkins 1976, series M)
  it.each<{ x: number[], y: number[], maxLag: number, r: number[] }>(reference.crossCorrelation)('equals R ccf: $id', ({ x, y, maxLag, r }) => {
    expect(largestDifference(crossCorrelation(Float64Array.from(x), Float64Array.from(y), maxLag), r)).toBeLessThan(1e-14)
  })
  it.each(['BJsales_diff', 'BJsales_prewhitened'])('finds the published delay of 3 in %s', (id) => {
    // Box, Jenkins (1976) Time Series Analysis, section 11: sales follow the leading indicator by 3 periods
    const c = reference.crossCorrelation.find((v: { id: string }) => v.id === id)
    const r = crossCorrelation(Float64Array.from(c.x), Float64Array.from(c.y), 15).map(Math.abs)
    expect(r.indexOf(Math.max(...r)) - 15).toBe(3)
  })
  it('equals R ccf on long records and lags, by block transforms', () => {
    const { xCsv, yCsv, maxLag, lags, r } = reference.signals
    const ours = crossCorrelation(signal(xCsv), signal(yCsv), maxLag)
    expect(largestDifference(lags.map((k: number) => ours[maxLag + k]), r)).toBeLessThan(1e-15)
  })
  it('turns round when the records are swapped', () => {
    const x = signal('signals/bic_qpc.csv')
    const y = signal('signals/bic_noqpc.csv')
    expect(largestDifference(crossCorrelation(y, x, 200).reverse(), crossCorrelation(x, y, 200))).toBeLessThan(1e-15)
  })
  it('is NaN when one record stands still', () => {
    expect([...crossCorrelation(Float64Array.of(1, 2, 3), Float64Array.of(4, 4, 4), 1)]).toEqual([NaN, NaN, NaN])
  })
  it('refuses unequal lengths and NaN', () => {
    expect(() => crossCorrelation(Float64Array.of(1, 2), Float64Array.of(1), 0)).toThrow('got 2 and 1')
    expect(() => crossCorrelation(Float64Array.of(1, 2), Float64Array.of(1, NaN), 0)).toThrow('y[1]')
  })
})
