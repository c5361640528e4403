import { describe, expect, it } from 'vitest'
import { autocovariance } from '../../../shared/assessment/statistics/autocovariance'
import { bootstrapBlockLength } from '../../../shared/assessment/statistics/bootstrapBlockLength'
import { mean } from '../../../shared/assessment/statistics/mean'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { stationaryBootstrap } from '../../../shared/assessment/statistics/stationaryBootstrap'
import { variance } from '../../../shared/assessment/statistics/variance'
import { referenceCases, signal } from './reference'

describe('bootstrapBlockLength', () => {
  // the same definition in plain Python loops
  it.each([...referenceCases('bootstrap')])('%s', (_, { inputs, expected }) => {
    expect(Math.abs(bootstrapBlockLength(signal(inputs.csv)) / expected.blockLength - 1)).toBeLessThan(1e-9)
  })
  it('comes near (2 rho / (1 - rho^2))^(2/3) n^(1/3), the optimum of a first-order process', () => {
    // Politis, White (2004): G = 2 s^2 rho/(1-rho)^2, g(0) = s^2 (1+rho)/(1-rho), D = 2 g(0)^2 (2009); mean over 20 long records
    for (const rho of [0.3, 0.6, 0.8]) {
      const g = seededRandom(99)
      const n = 20000
      let sum = 0
      for (let i = 0; i < 20; i++) {
        const x = new Float64Array(n)
        x[0] = g.normal() / Math.sqrt(1 - rho * rho)
        for (let t = 1; t < n; t++) x[t] = rho * x[t - 1] + g.normal()
        sum += bootstrapBlockLength(x) / 20
      }
      const optimum = Math.cbrt((2 * rho / (1 - rho * rho)) ** 2) * Math.cbrt(n)
      expect(Math.abs(sum / optimum - 1)).toBeLessThan(0.1)
    }
  })
  it('does not depend on offset, scale and direction of time', () => {
    const x = signal('signals/R_sunspot.year.csv')
    expect(bootstrapBlockLength(x.map(v => 10 - 3 * v).reverse())).toBeCloseTo(bootstrapBlockLength(x), 9)
  })
  it('is 1 for a constant, and refuses fewer than 8 samples', () => {
    expect(bootstrapBlockLength(new Float64Array(100).fill(0.1))).toBe(1)
    expect(() => bootstrapBlockLength(new Float64Array(7))).toThrow('got 7')
  })
})

describe('stationaryBootstrap', () => {
  it('has the variance of the mean that its authors derive', () => {
    // Politis, Romano (1994), Lemma 1: n var(mean*) = c_0 + 2 sum_i [(1 - i/n)(1-p)^i + (i/n)(1-p)^(n-i)] c_i
    const x = signal('signals/R_sunspot.year.csv')
    const n = x.length
    const c = autocovariance(x, n - 1)
    for (const block of [1, 8, 30]) {
      const p = 1 / block
      let expected = c[0]
      for (let i = 1; i < n; i++) expected += 2 * ((1 - i / n) * (1 - p) ** i + i / n * (1 - p) ** (n - i)) * c[i]
      const g = seededRandom(17)
      const index = new Int32Array(n)
      const means = Float64Array.from({ length: 8000 }, () => {
        stationaryBootstrap(n, block, g, index)
        let sum = 0
        for (let i = 0; i < n; i++) sum += x[index[i]]
        return sum / n
      })
      // relative deviation of a variance from 8,000 draws: 1.6 %
      expect(Math.abs(variance(means) * n / expected - 1)).toBeLessThan(0.06)
      expect(Math.abs(mean(means) - mean(x))).toBeLessThan(4 * Math.sqrt(expected / n / 8000))
    }
  })
  it('draws blocks of geometric length with the given mean, wrapped', () => {
    const index = stationaryBootstrap(200_000, 20, seededRandom(3))
    let breaks = 0
    for (let i = 1; i < index.length; i++) if (index[i] !== (index[i - 1] + 1) % index.length) breaks++
    expect(Math.abs(breaks / index.length - 0.05)).toBeLessThan(0.002)
  })
  it('is repeatable, reuses its output, refuses bad lengths', () => {
    expect(stationaryBootstrap(50, 5, seededRandom(1))).toEqual(stationaryBootstrap(50, 5, seededRandom(1)))
    const out = new Int32Array(50)
    expect(stationaryBootstrap(50, 5, seededRandom(1), out)).toBe(out)
    expect(() => stationaryBootstrap(50, 0.5, seededRandom(1))).toThrow('got 0.5')
    expect(() => stationaryBootstrap(0, 5, seededRandom(1))).toThrow('at least 1 sample')
    expect(() => stationaryBootstrap(50, 5, seededRandom(1), new Int32Array(3))).toThrow('length 50')
  })
})
