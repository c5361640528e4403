import { describe, expect, it } from 'vitest'
import { isInsufficient } from '../../../shared/assessment/types'
import { crossCorrelationTest } from '../../../shared/assessment/valve/crossCorrelationTest'
import { halfCycleShape } from '../../../shared/assessment/valve/halfCycleShape'
import { peakAsymmetry } from '../../../shared/assessment/valve/peakAsymmetry'
import { stickSlipPatterns } from '../../../shared/assessment/valve/stickSlipPatterns'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { referenceCase, referenceSignal } from './referenceSignals'

const told = <T>(result: T | { status: 'insufficient', reason: string }): T => {
  if (isInsufficient(result)) throw new Error(result.reason)
  return result as T
}
const sine = (length: number, period: number, phase = 0) => Float64Array.from({ length }, (_, k) => Math.sin(2 * Math.PI * k / period - phase))

describe('cross-correlation test (Horch 1999)', () => {
  const cases: Record<string, [Float64Array, Float64Array]> = {
    sine_phi100: [sine(4000, 100), sine(4000, 100, 100 * Math.PI / 180)],
    sine_phi135: [sine(4000, 100), sine(4000, 100, 135 * Math.PI / 180)],
    sine_phi170: [sine(4000, 100), sine(4000, 100, 170 * Math.PI / 180)],
    tri_square: [referenceSignal('horch_tri_square').op!, referenceSignal('horch_tri_square').pv!],
  }
  const verdicts: Record<string, string> = { 'stiction': 'sticking', 'no stiction': 'sound', 'undetermined': 'undecided' }
  for (const [name, [op, pv]] of Object.entries(cases)) {
    it(`${name} as NumPy and R (fixtures/reference/scripts/stiction.py)`, () => {
      const { expected } = referenceCase('stiction', `horch_${name}`)
      const result = told(crossCorrelationTest(op, pv, 99))
      expect(result.lagAsymmetry).toBeCloseTo(expected.d_tau, 6)
      expect(result.valueAsymmetry).toBeCloseTo(expected.d_rho, 6)
      expect(result.lagRight).toBeCloseTo(expected.tau_r, 6)
      expect(result.lagLeft).toBeCloseTo(expected.tau_l, 6)
      expect(result.valueAtZero).toBeCloseTo(expected.r0, 6)
      expect(result.says).toBe(verdicts[expected.verdict])
    })
  }
  it('closed form on sines: lag asymmetry 2 p / pi, value asymmetry (1 - cos p) / (1 + cos p)', () => {
    for (const degrees of [10, 30, 45, 60, 80, 100, 135, 170]) {
      const { expected } = referenceCase('stiction', `horch_theory_phi${degrees}`)
      const result = told(crossCorrelationTest(sine(40_000, 200), sine(40_000, 200, degrees * Math.PI / 180), 200))
      // the biased estimate and whole lags leave a little
      expect(result.lagAsymmetry).toBeCloseTo(expected.d_tau, 1)
      expect(result.valueAsymmetry).toBeCloseTo(expected.d_rho, 1)
    }
  })
  it('scale and sign of both do not matter', () => {
    const [op, pv] = cases.sine_phi135!
    const a = told(crossCorrelationTest(op, pv, 99)), b = told(crossCorrelationTest(op.map(v => 50 + 3 * v), pv.map(v => 7 - 0.2 * v), 99))
    expect(b.lagAsymmetry).toBeCloseTo(a.lagAsymmetry, 8)
    expect(b.valueAsymmetry).toBeCloseTo(a.valueAsymmetry, 8)
  })
  it('cannot tell on a signal that stands still, refuses unequal lengths', () => {
    expect(isInsufficient(crossCorrelationTest(new Float64Array(100), sine(100, 20), 20))).toBe(true)
    expect(isInsufficient(crossCorrelationTest(sine(200, 100), sine(200, 100), 5))).toBe(true)
    expect(() => crossCorrelationTest(sine(10, 5), sine(11, 5), 3)).toThrow(RangeError)
  })
})

describe('shape of half-cycles (He and others 2007) and peak asymmetry (Singhal, Salsbury 2005)', () => {
  for (const name of ['sine', 'triangle', 'exp_relay', 'sine_noise', 'triangle_noise']) {
    it(`${name} as NumPy and R (fixtures/reference/scripts/stiction.py)`, () => {
      const { e } = referenceSignal(`shape_${name}`)
      const { expected } = referenceCase('stiction', `shape_${name}`)
      const shape = told(halfCycleShape(e!)), asymmetry = told(peakAsymmetry(e!))
      expect(shape.index).toBeCloseTo(expected.he.SI, 6)
      expect(shape.sineError).toBeCloseTo(expected.he.MSE_sin, 6)
      expect(shape.triangleError).toBeCloseTo(expected.he.MSE_tri, 6)
      expect(asymmetry.ratio).toBeCloseTo(expected.singhal.R_mean, 6)
      expect(asymmetry.median).toBeCloseTo(expected.singhal.R_median, 6)
      expect(asymmetry.halfCycles).toBe(expected.singhal.n)
    })
  }
  it('closed form: errors of a fine triangle and a fine sine', () => {
    const { expected } = referenceCase('stiction', 'he_analytic')
    const s = Float64Array.from({ length: 8000 }, (_, k) => Math.sin(2 * Math.PI * (k + 0.5) / 800))
    const triangle = s.map(v => 2 / Math.PI * Math.asin(v))
    expect(told(halfCycleShape(triangle)).sineError).toBeCloseTo(expected.MSE_sin_of_unit_triangle, 3)
    // The triangle's peak may move off the middle here, the closed form's may not: at most as large.
    expect(told(halfCycleShape(s)).triangleError).toBeLessThan(expected.MSE_tri_of_unit_sine + 1e-4)
    expect(told(halfCycleShape(s)).triangleError).toBeGreaterThan(0.95 * expected.MSE_tri_of_unit_sine)
  })
  it('scale and sign do not matter; time reversal turns the asymmetry round', () => {
    const { e } = referenceSignal('shape_exp_relay')
    expect(told(halfCycleShape(e!.map(v => -40 * v))).index).toBeCloseTo(told(halfCycleShape(e!)).index, 10)
    expect(told(peakAsymmetry(e!.map(v => -40 * v))).median).toBeCloseTo(told(peakAsymmetry(e!)).median, 10)
    expect(told(peakAsymmetry(e!.slice().reverse())).median).toBeCloseTo(1 / told(peakAsymmetry(e!)).median, 6)
  })
  it('cannot tell with too few half-cycles', () => {
    for (const x of [new Float64Array(0), new Float64Array(500), sine(100, 50)]) {
      expect(isInsufficient(halfCycleShape(x))).toBe(true)
      expect(isInsufficient(peakAsymmetry(x))).toBe(true)
    }
  })
})

describe('stick-slip patterns (Yamashita 2006)', () => {
  const { op, mv } = referenceSignal('yamashita_kano')
  const { expected } = referenceCase('stiction', 'yamashita')
  it('sticking stem as NumPy, at one standard deviation and at thirds (fixtures/reference/scripts/stiction.py)', () => {
    for (const [threshold, reference] of [[1, expected.stiction_S5_J2], [0.4307, expected.stiction_thr0p4307]] as const) {
      const result = told(stickSlipPatterns(op!, mv!, threshold))
      expect(result.index1).toBeCloseTo(reference.rho1, 9)
      expect(result.index2).toBeCloseTo(reference.rho2, 9)
      expect(result.index3).toBeCloseTo(reference.rho3, 9)
    }
  })
  it('a stem that follows has none', () => {
    expect(told(stickSlipPatterns(op!, op!, 1))).toMatchObject({ index1: 0, index2: 0, index3: 0 })
  })
  it('unrelated random data give a quarter (2 of 8 pairs)', () => {
    const random = seededRandom(1)
    const [a, b] = [0, 1].map(() => Float64Array.from({ length: 20_000 }, () => random.normal()))
    expect(told(stickSlipPatterns(a!, b!)).index1).toBeCloseTo(0.25, 1)
  })
  it('mirror does not matter; cannot tell on still signals; refuses unequal lengths', () => {
    expect(told(stickSlipPatterns(op!.map(v => 9 - v), mv!.map(v => -2 * v))).index2).toBeCloseTo(told(stickSlipPatterns(op!, mv!)).index2, 9)
    expect(isInsufficient(stickSlipPatterns(op!, new Float64Array(op!.length)))).toBe(true)
    expect(isInsufficient(stickSlipPatterns(op!.subarray(0, 2), mv!.subarray(0, 2)))).toBe(true)
    expect(() => stickSlipPatterns(op!, mv!.subarray(1))).toThrow(/one length/)
  })
})
