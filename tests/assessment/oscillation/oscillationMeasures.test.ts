import { describe, expect, it } from 'vitest'
import { areaRegularity } from '../../../shared/assessment/oscillation/areaRegularity'
import { decayRatio } from '../../../shared/assessment/oscillation/decayRatio'
import { loadDetection } from '../../../shared/assessment/oscillation/loadDetection'
import { regularity } from '../../../shared/assessment/oscillation/regularity'
import { signRuns } from '../../../shared/assessment/oscillation/signRuns'
import { zeroCrossings } from '../../../shared/assessment/oscillation/zeroCrossings'
import { referenceCase, referenceSignal } from '../valve/referenceSignals'

/** Biased autocorrelation straight from the definition, so that these tests rest on nothing else of the project. */
function directAutocorrelation(x: Float64Array, maxLag: number): Float64Array {
  const mean = x.reduce((a, b) => a + b, 0) / x.length
  const d = x.map(v => v - mean)
  const c = Float64Array.from({ length: maxLag + 1 }, (_, lag) => { let s = 0; for (let i = lag; i < d.length; i++) s += d[i]! * d[i - lag]!; return s })
  return c.map(v => v / c[0]!)
}
const movingAverage = (x: Float64Array, w: number) =>
  Float64Array.from({ length: x.length - w + 1 }, (_, i) => x.subarray(i, i + w).reduce((a, b) => a + b, 0) / w)
const close = (value: number, expected: number, relative = 1e-6) =>
  expect(Math.abs(value - expected)).toBeLessThanOrEqual(relative * Math.abs(expected))

const names = ['sine60_noise', 'sine60_clean', 'damped_sine', 'white', 'ar2_zeta0.1', 'square60', 'two_sines', 'triangle60', 'ar1_0.9']

describe('oscillation measures against independent NumPy and R computations (fixtures/reference/scripts/oscillation.py)', () => {
  for (const name of names) {
    it(name, () => {
      const { e } = referenceSignal(`osc_${name}`)
      const { expected } = referenceCase('oscillation', name)
      const acf = directAutocorrelation(e!, 1500)
      const loads = loadDetection(e!, { amplitudeLimit: 0.5, periodS: 60, sampleIntervalS: 1 })
      expect(loads.loads).toBe(expected.hagglund.n_loads)
      close(loads.highestCount, expected.hagglund.x_max)
      close(loads.integralLimit, expected.hagglund.IAE_lim)
      expect(loads.firstDetection).toBe(expected.hagglund.first_detection_sample)
      const r = regularity(acf)
      close(r.period, expected.regularity.period)
      // Above r = 100 the spread of the intervals is rounding: the reference says compare to 1e-3.
      close(r.regularity, expected.regularity.r_ddof1, expected.regularity.r_ddof1 > 100 ? 1e-3 : 1e-6)
      close(decayRatio(acf), expected.miao_seborg.R)
      close(areaRegularity(e!), expected.forsman_stattin.h)
    })
  }
  for (const [name, w] of [['sine60_noise', 5], ['sine60_noise', 9], ['ar2_zeta0.1', 9], ['white', 9], ['two_sines', 17], ['triangle60', 5]] as const) {
    it(`${name} after a moving average of ${w}`, () => {
      const { expected } = referenceCase('oscillation', `${name}_MA${w}`)
      const x = movingAverage(referenceSignal(`osc_${name}`).e!, w)
      const acf = directAutocorrelation(x, 1500)
      close(regularity(acf).regularity, expected.regularity.r_ddof1, expected.regularity.r_ddof1 > 100 ? 1e-3 : 1e-6)
      close(decayRatio(acf), expected.miao_seborg.R)
      close(areaRegularity(x), expected.forsman_stattin.h)
    })
  }
})

describe('oscillation measures, closed form', () => {
  it('a sine triggers load detection just above the limit, not below (Hägglund 1995)', () => {
    for (const amplitude of [0.9, 0.99, 1.01, 1.1]) {
      const x = Float64Array.from({ length: 3000 }, (_, k) => amplitude * Math.sin(2 * Math.PI * (k + 0.5) / 60))
      expect(loadDetection(x, { amplitudeLimit: 1, periodS: 60, sampleIntervalS: 1 }).oscillating).toBe(amplitude > 1)
    }
  })
  it('the decay ratio is exp(-pi zeta / sqrt(1 - zeta^2)), 0.5 at zeta 0.2155 (algebra)', () => {
    for (const zeta of [0.05, 0.1, 0.2, 0.2154535, 0.3]) {
      const { expected } = referenceCase('oscillation', `miao_theory_zeta${zeta === 0.2154535 ? 0.215453 : zeta}`)
      // Extrema of exp(-a t) (cos(t) + a sin(t)) lie at multiples of pi exactly.
      const a = zeta / Math.sqrt(1 - zeta * zeta)
      const acf = Float64Array.from({ length: 1000 }, (_, k) => { const t = k * Math.PI / 200; return Math.exp(-a * t) * (Math.cos(t) + a * Math.sin(t)) })
      close(decayRatio(acf), expected.R)
    }
  })
  it('equal intervals: r is unbounded, the period exact', () => {
    const square = Float64Array.from({ length: 200 }, (_, k) => (Math.floor(k / 8) % 2 ? -1 : 1))
    expect(regularity(square)).toEqual({ regularity: Infinity, period: 16, periodSd: 0, intervals: 10 })
  })
})

describe('oscillation measures, invariance', () => {
  const x = referenceSignal('osc_ar2_zeta0.1').e!
  it('scale does not matter, inputs are left alone', () => {
    const before = x.slice()
    const scaled = x.map(v => -250 * v)
    const acf = directAutocorrelation(x, 500), scaledAcf = acf.map(v => 7 * v)
    expect(areaRegularity(scaled)).toBeCloseTo(areaRegularity(x), 12)
    expect(decayRatio(scaledAcf)).toBeCloseTo(decayRatio(acf), 12)
    expect(regularity(scaledAcf).regularity).toBeCloseTo(regularity(acf).regularity, 10)
    expect(loadDetection(scaled, { amplitudeLimit: 125, periodS: 60, sampleIntervalS: 1 }).loads).toBe(loadDetection(x, { amplitudeLimit: 0.5, periodS: 60, sampleIntervalS: 1 }).loads)
    expect(x).toEqual(before)
  })
})

describe('oscillation measures, degenerate and misuse', () => {
  it('nothing to measure is NaN', () => {
    const flat = new Float64Array(100), empty = new Float64Array(0)
    for (const x of [flat, empty]) {
      expect(regularity(x).regularity).toBeNaN()
      expect(decayRatio(x)).toBeNaN()
      expect(areaRegularity(x)).toBeNaN()
      expect(zeroCrossings(x)).toHaveLength(0)
      expect(loadDetection(x, { amplitudeLimit: 1, periodS: 60, sampleIntervalS: 1 }).loads).toBe(0)
    }
    expect([...signRuns(empty).edges]).toEqual([0])
  })
  it('a zero and a gap belong to the half-cycle before them', () => {
    expect([...signRuns(Float64Array.of(1, 0, Number.NaN, 2, -1, 0, -3)).edges]).toEqual([0, 4, 7])
  })
  it('refuses limits that are not positive', () => {
    expect(() => loadDetection(new Float64Array(3), { amplitudeLimit: 0, periodS: 60, sampleIntervalS: 1 })).toThrow(/amplitudeLimit/)
    expect(() => areaRegularity(new Float64Array(3), { areaSimilarity: 1 })).toThrow(/areaSimilarity/)
  })
})
