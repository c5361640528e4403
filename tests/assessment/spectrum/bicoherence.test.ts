import { describe, expect, it } from 'vitest'
import { isInsufficient } from '../../../shared/assessment/types'
import { bicoherence } from '../../../shared/assessment/spectrum/bicoherence'
import { nonlinearityTest } from '../../../shared/assessment/spectrum/nonlinearityTest'
import { seededRandom, type SeededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { largestDifference, referenceCases, signal } from '../statistics/reference'

const cases = [...referenceCases('bicoherence')].filter(([id]) => !id.includes('MC'))

describe('bicoherence against numpy and R', () => {
  it.each(cases)('%s', (_, { inputs, expected }) => {
    const b = bicoherence(signal(inputs.csv), { segmentLength: inputs.nfft, overlapFraction: inputs.overlap })
    expect([b.segments, b.squared.length]).toEqual([expected.K, expected.L])
    expect(b.meanSquared).toBeCloseTo(expected.mean_bic2, 12)
    expect(b.maximumSquared).toBeCloseTo(expected.max_bic2, 12)
    const sd = Math.sqrt(b.squared.reduce((s, v) => s + (v - b.meanSquared) ** 2, 0) / b.squared.length)
    expect(sd).toBeCloseTo(expected.std_bic2, 12)
    expect([b.first[b.maximumAt], b.second[b.maximumAt]]).toEqual(expected.argmax)
    // chi-squared limit of 5 %: 5.99 / (2 segments)
    expect(b.squared.filter(v => v > expected.bic2_crit_pointwise).length).toBe(expected.n_significant)
  })
})

describe('bicoherence', () => {
  const x = signal('signals/bic_qpc.csv')
  it('does not depend on offset, scale and direction of time', () => {
    const b = bicoherence(x).squared
    expect(largestDifference(bicoherence(x.map(v => 50 - 3 * v)).squared, b)).toBeLessThan(1e-9)
    expect(largestDifference(bicoherence(x.slice().reverse()).squared, b)).toBeLessThan(0.05)
  })
  it('is NaN for a constant', () => {
    expect(bicoherence(new Float64Array(2048).fill(0.1))).toMatchObject({ meanSquared: NaN, maximumSquared: NaN })
  })
  it('refuses short records, odd segments, NaN', () => {
    expect(() => bicoherence(x.subarray(0, 500))).toThrow('got 7')
    expect(() => bicoherence(x, { segmentLength: 63 })).toThrow('got 63')
    expect(() => bicoherence(x.map((v, i) => i === 9 ? NaN : v))).toThrow('x[9]')
  })
})

describe('nonlinearityTest', () => {
  const told = (x: Float64Array, seed = 1, surrogates = 19) => {
    const test = nonlinearityTest(x, { random: seededRandom(seed), surrogates })
    if (isInsufficient(test)) throw new Error(test.reason)
    return test
  }
  it.each(['gauss_white', 'linear_ar_gauss', 'linear_ar_exponential_noise', 'noqpc'])('finds none in the linear record %s', (name) => {
    expect(told(signal(`signals/bic_${name}.csv`)).pValue).toBeGreaterThan(0.05)
  })
  it('finds it in quadratic phase coupling', () => {
    const test = told(signal('signals/bic_qpc.csv'))
    expect(test).toMatchObject({ pValue: 0.05, rank: 19 })
    expect(test.effect).toBeGreaterThan(4)
  })

  const filtered = (draw: () => number, phi: number[]) => {
    const y = new Float64Array(2248)
    for (let t = 0; t < y.length; t++) {
      y[t] = draw()
      for (let j = 0; j < phi.length && j < t; j++) y[t] += phi[j] * y[t - 1 - j]
    }
    return y.slice(200)
  }
  const exponential = (g: SeededRandom) => () => -Math.log(1 - g.uniform()) - 1
  const resonance = [2 * 0.97 * Math.cos(2 * Math.PI / 20), -0.97 * 0.97]
  const rate = (make: (g: SeededRandom) => Float64Array) => {
    const g = seededRandom(31)
    let found = 0
    for (let i = 0; i < 12; i++) if (told(make(g), i).pValue <= 0.05) found++
    return found
  }
  // 12 records each, nominal 5 %: 3 or more would come by chance in 2 %
  it.each<[string, (g: SeededRandom) => Float64Array]>([
    ['first order, Gaussian', g => filtered(g.normal, [0.8])],
    ['first order, exponential noise', g => filtered(exponential(g), [0.8])],
    ['resonance, Gaussian', g => filtered(g.normal, resonance)],
    ['resonance, exponential noise', g => filtered(exponential(g), resonance)],
  ])('seldom accuses linear records: %s', (_, make) => {
    expect(rate(make)).toBeLessThan(3)
  })
  it('finds most wandering saw-teeth in noise', () => {
    expect(rate((g) => {
      let phase = g.uniform()
      return Float64Array.from({ length: 2048 }, () => {
        phase += (1 + 0.3 * g.normal()) / 21.3
        const f = phase - Math.floor(phase)
        return (f < 0.8 ? f / 0.8 : (1 - f) / 0.2) + 0.2 * g.normal()
      })
    })).toBeGreaterThan(9)
  })
  it('is insufficient on short and constant records, refuses too few surrogates', () => {
    expect(nonlinearityTest(new Float64Array(1000), { random: seededRandom(1) })).toEqual({ status: 'insufficient', reason: '15 segments of 64 samples, at least 16 are needed' })
    expect(nonlinearityTest(new Float64Array(2048).fill(3), { random: seededRandom(1) })).toMatchObject({ status: 'insufficient' })
    expect(() => nonlinearityTest(new Float64Array(2048), { random: seededRandom(1), surrogates: 5 })).toThrow('got 5')
  })
  it('is repeatable and leaves its input alone', () => {
    const x = signal('signals/bic_qpc.csv')
    const before = x.slice()
    expect(told(x, 9, 9)).toEqual(told(x, 9, 9))
    expect(x).toEqual(before)
  })
})
