import { describe, expect, it } from 'vitest'
import { autoregressiveBurg } from '../../../shared/assessment/statistics/autoregressiveBurg'
import { autoregressiveLeastSquares } from '../../../shared/assessment/statistics/autoregressiveLeastSquares'
import { autoregressiveYuleWalker } from '../../../shared/assessment/statistics/autoregressiveYuleWalker'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { largestDifference, referenceCases, signal } from './reference'

const cases = referenceCases('autoregression')
const list = (v: number | number[]) => Array.isArray(v) ? v : [v]
const series = ['lh', 'log10lynx', 'sunspot.year', 'LakeHuron']
const estimators = [
  { name: 'yw', fit: autoregressiveYuleWalker, fixed: 'yw', variance: (v: number, n: number, p: number) => v * n / (n - p - 1) },
  { name: 'burg', fit: autoregressiveBurg, fixed: 'burg', variance: (v: number) => v },
  { name: 'ols_noint', fit: autoregressiveLeastSquares, fixed: 'ols_demean_noint', variance: (v: number) => v },
]

describe.each(estimators)('autoregressive model, $name, against R stats::ar', ({ name, fit, fixed, variance }) => {
  it.each(series)('chooses R\'s order and coefficients for %s', (s) => {
    const { inputs, expected } = cases.get(`${s}/ar_${name}`)
    const model = fit(signal(inputs.csv), { maxOrder: inputs.order_max })
    expect(model.order).toBe(expected.order)
    expect(largestDifference(model.coefficients, list(expected.ar))).toBeLessThan(1e-10)
    expect(Math.abs(variance(model.innovationVariance, model.samples, model.order) / expected['var.pred'] - 1)).toBeLessThan(1e-10)
    expect(largestDifference(model.aicAboveMinimum!, expected.aic_minus_min)).toBeLessThan(1e-8)
    expect(model.mean).toBeCloseTo(expected['x.mean'], 10)
  })
  it.each(series)('fits the orders 2, 5 and 10 to %s as R does', (s) => {
    const { inputs, expected } = cases.get(`${s}/fixed_orders`)
    for (const order of [2, 5, 10]) {
      const model = fit(signal(inputs.csv), { order })
      expect(largestDifference(model.coefficients, list(expected[order][fixed].ar))).toBeLessThan(1e-10)
      expect(Math.abs(variance(model.innovationVariance, model.samples, order) / expected[order][fixed]['var.pred'] - 1)).toBeLessThan(1e-10)
    }
  })
  it('does not depend on offset, and its variance goes with the square of the scale', () => {
    const x = signal('signals/harris_A_K0.3_N2000.csv')
    const a = fit(x, { maxOrder: 30 })
    const b = fit(x.map(v => 500 - 20 * v), { maxOrder: 30 })
    expect(b.order).toBe(a.order)
    expect(largestDifference(b.coefficients, a.coefficients)).toBeLessThan(1e-9)
    expect(b.innovationVariance / a.innovationVariance).toBeCloseTo(400, 6)
  })
  it('says order 0, variance 0 of a constant record', () => {
    const model = fit(new Float64Array(200).fill(0.1), { maxOrder: 10 })
    expect([model.order, model.innovationVariance, model.coefficients.length]).toEqual([0, 0, 0])
  })
  it('refuses orders that the record cannot carry, and NaN', () => {
    expect(() => fit(new Float64Array(10), { order: 10 })).toThrow('got 10')
    expect(() => fit(new Float64Array(10), { maxOrder: -1 })).toThrow('got -1')
    expect(() => fit(Float64Array.of(1, 2, NaN, 4, 5, 6), { order: 1 })).toThrow('x[2]')
  })
  it('leaves its input alone', () => {
    const x = signal('signals/R_lh.csv')
    const before = x.slice()
    fit(x, { maxOrder: 10 })
    expect(x).toEqual(before)
  })
})

describe('least squares', () => {
  it('finds the coefficients of an undamped recursion and refuses more lags than it has', () => {
    // x_t = 2 cos(w) x_(t-1) - x_(t-2) exactly, mean 0 over whole periods
    const x = Float64Array.from({ length: 400 }, (_, t) => Math.sin(2 * Math.PI * (t + 0.3) / 20))
    const two = autoregressiveLeastSquares(x, { order: 2 })
    // no residual is left but rounding: the model is not determined beyond it
    expect(two.innovationVariance).toBeNaN()
    const noise = seededRandom(3)
    const slightly = autoregressiveLeastSquares(x.map(v => v + 1e-4 * noise.normal()), { order: 2 })
    expect(slightly.coefficients[0]).toBeCloseTo(2 * Math.cos(2 * Math.PI / 20), 4)
    expect(slightly.coefficients[1]).toBeCloseTo(-1, 4)
  })
})
