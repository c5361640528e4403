import { describe, expect, it } from 'vitest'
import { autocorrelation } from '../../../shared/assessment/statistics/autocorrelation'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { surrogate } from '../../../shared/assessment/statistics/surrogate'
import { largestDifference, signal } from './reference'

describe('surrogate', () => {
  // Schreiber, Schmitz (1996): the same values, nearly the same spectrum (hence autocorrelation), nothing else
  it.each(['bic_linear_ar_exponential_noise', 'bic_square_of_gauss', 'bic_qpc'])('keeps values and correlation of %s', (name) => {
    const x = signal(`signals/${name}.csv`)
    const y = surrogate(x, seededRandom(5))
    expect(y.slice().sort()).toEqual(x.slice().sort())
    expect(largestDifference(autocorrelation(y, 100), autocorrelation(x, 100))).toBeLessThan(0.03)
    // another order, not the record itself
    let same = 0
    for (let i = 0; i < x.length; i++) if (x[i] === y[i]) same++
    expect(same).toBeLessThan(x.length / 50)
  })
  it('takes lengths that are no power of two', () => {
    const x = signal('signals/R_sunspot.year.csv')
    const y = surrogate(x, seededRandom(5))
    expect(y.slice().sort()).toEqual(x.slice().sort())
    expect(largestDifference(autocorrelation(y, 22), autocorrelation(x, 22))).toBeLessThan(0.1)
  })
  it('loses the direction of time: the skewness of the increments of a saw-tooth', () => {
    const saw = Float64Array.from({ length: 2048 }, (_, t) => t % 32)
    const skew = (v: Float64Array) => v.reduce((s, _, t) => t ? s + (v[t] - v[t - 1]) ** 3 : s, 0) / v.reduce((s, _, t) => t ? s + Math.abs(v[t] - v[t - 1]) ** 3 : s, 0)
    expect(skew(saw)).toBeLessThan(-0.9)
    expect(Math.abs(skew(surrogate(saw, seededRandom(5))))).toBeLessThan(0.3)
  })
  it('is repeatable, leaves its input alone, takes a constant, refuses too few samples', () => {
    const x = signal('signals/R_lh.csv')
    const before = x.slice()
    expect(surrogate(x, seededRandom(5))).toEqual(surrogate(x, seededRandom(5)))
    expect(x).toEqual(before)
    expect(surrogate(new Float64Array(16).fill(2), seededRandom(5))).toEqual(new Float64Array(16).fill(2))
    expect(() => surrogate(new Float64Array(7), seededRandom(5))).toThrow('got 7')
  })
})
