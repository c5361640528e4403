import { describe, expect, it } from 'vitest'
import { laggedProducts } from '../../../shared/assessment/statistics/laggedProducts'
import { largestDifference } from './reference'

const whole = (n: number, f: (t: number) => number) => Float64Array.from({ length: n }, (_, t) => f(t))
/** the definition, on integers: exact in any order of summation */
const byDefinition = (a: Float64Array, b: Float64Array, maxLag: number) =>
  Array.from({ length: maxLag + 1 }, (_, k) => a.reduce((s, v, t) => t + k < b.length ? s + v * b[t + k] : s, 0))

describe('laggedProducts', () => {
  // lengths and lags around the block borders
  it.each([[1, 0], [5, 4], [200, 41], [200, 199], [257, 64], [1000, 63], [1000, 65], [1024, 128], [1025, 129], [3000, 2999]])('equals the definition for n = %i, maxLag = %i', (n, maxLag) => {
    const a = whole(n, t => (t * 37) % 101 - 50)
    const b = whole(n, t => (t * 53) % 89 - 44)
    expect(largestDifference(laggedProducts(a, b, maxLag), byDefinition(a, b, maxLag))).toBeLessThan(1e-6)
    expect(largestDifference(laggedProducts(a, a, maxLag), byDefinition(a, a, maxLag))).toBeLessThan(1e-6)
  })
  it('refuses unequal lengths', () => {
    expect(() => laggedProducts(new Float64Array(3), new Float64Array(4), 1)).toThrow('got 3 and 4')
  })
})
