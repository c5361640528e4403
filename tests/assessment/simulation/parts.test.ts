import { describe, expect, it } from 'vitest'
import { addLoad } from '../../../shared/assessment/simulation/addLoad'
import { fillSetpoint } from '../../../shared/assessment/simulation/fillSetpoint'
import { idealTuning } from '../../../shared/assessment/simulation/idealTuning'
import { mixSeed } from '../../../shared/assessment/simulation/mixSeed'
import { noiseSource } from '../../../shared/assessment/simulation/noiseSource'
import type { LoadPart } from '../../../shared/assessment/simulation/scenario'

const load = (part: LoadPart, n: number, stepS: number) => {
  const out = new Float64Array(n)
  addLoad(part, out, stepS)
  return out
}

describe('noiseSource', () => {
  it('has the moments and tails of the standard normal (tables: P(|x| > 1, 2, 3, 4) = 0.31731, 0.045500, 0.0026998, 6.334e-5)', () => {
    const { normal } = noiseSource(3)
    const n = 2e6
    const beyond = [0, 0, 0, 0]
    let s1 = 0, s2 = 0, s3 = 0, s4 = 0
    for (let i = 0; i < n; i++) {
      const x = normal()
      s1 += x
      s2 += x * x
      s3 += x ** 3
      s4 += x ** 4
      for (let k = 0; k < 4; k++) if (Math.abs(x) > k + 1) beyond[k]++
    }
    // five standard errors
    expect(Math.abs(s1 / n)).toBeLessThan(5 / Math.sqrt(n))
    expect(Math.abs(s2 / n - 1)).toBeLessThan(5 * Math.sqrt(2 / n))
    expect(Math.abs(s3 / n)).toBeLessThan(5 * Math.sqrt(15 / n))
    expect(Math.abs(s4 / n - 3)).toBeLessThan(5 * Math.sqrt(96 / n))
    for (const [k, p] of [0.3173105, 0.0455003, 0.0026998, 6.3342e-5].entries()) expect(Math.abs(beyond[k] / n - p)).toBeLessThan(5 * Math.sqrt(p / n))
  })
  it('is white, repeatable, and other for another seed', () => {
    const draw = (seed: number) => { const { normal } = noiseSource(seed); return Array.from({ length: 20_000 }, normal) }
    const x = draw(9)
    expect(draw(9)).toEqual(x)
    expect(draw(10)[0]).not.toBe(x[0])
    for (const lag of [1, 2, 7]) expect(Math.abs(x.slice(lag).reduce((s, v, i) => s + v * x[i], 0) / x.length)).toBeLessThan(5 / Math.sqrt(x.length))
  })
  it('mixSeed gives seeds in range that differ by stream', () => {
    const seeds = new Set(Array.from({ length: 5000 }, (_, i) => mixSeed(7, i)))
    expect(seeds.size).toBe(5000)
    for (const s of seeds) expect(Number.isInteger(s) && s >= 0 && s < 2 ** 32).toBe(true)
  })
})

describe('addLoad (definitions)', () => {
  it('coloured noise has its variance and its correlation exp(-lag / time constant)', () => {
    for (const timeConstantS of [5, 100]) {
      const x = load({ kind: 'coloured', standardDeviation: 2, timeConstantS, seed: 1 }, 400_000, 1)
      const variance = x.reduce((s, v) => s + v * v, 0) / x.length
      expect(variance / 4).toBeGreaterThan(0.9)
      expect(variance / 4).toBeLessThan(1.08)
      let product = 0
      for (let i = timeConstantS; i < x.length; i++) product += x[i] * x[i - timeConstantS]
      expect(Math.abs(product / x.length / variance - Math.exp(-1))).toBeLessThan(0.06)
    }
  })
  it('steps add up, each over its rise', () => {
    expect([...load({ kind: 'steps', at: [2, 6], size: [4, -1], riseS: 0 }, 9, 1)]).toEqual([0, 0, 4, 4, 4, 4, 3, 3, 3])
    expect([...load({ kind: 'steps', at: [1, 3], size: [4, 2], riseS: 4 }, 9, 1)]).toEqual([0, 0, 1, 2, 3.5, 5, 5.5, 6, 6])
  })
  it('periodic parts: value at quarter turns, limited to their spans', () => {
    const at = (shape: 'sine' | 'triangle' | 'square') => [...load({ kind: 'periodic', periodS: 4, amplitude: 3, shape, phase: 0, spans: [{ fromS: 2, toS: 6 }] }, 8, 1)].map(x => Math.round(x * 1e9) / 1e9 + 0)
    expect(at('sine')).toEqual([0, 0, 0, -3, 0, 3, 0, 0])
    expect(at('triangle')).toEqual([0, 0, 3, 0, -3, 0, 0, 0])
    expect(at('square')).toEqual([0, 0, -3, -3, 3, 3, 0, 0])
  })
  it('a signal arrives after its delay, through its lag (step response of a lag)', () => {
    const values = Float32Array.from({ length: 50 }, (_, i) => i >= 10 ? 1 : 0)
    const x = load({ kind: 'signal', values, stepS: 10, gain: 5, lagS: 30, delayS: 20 }, 500, 1)
    expect(x[110]).toBe(0)
    expect(x[400]).toBeCloseTo(5, 3)
    expect(load({ kind: 'signal', values, stepS: 10, gain: 5, lagS: 0, delayS: 20 }, 500, 1)[115]).toBeCloseTo(2.5, 9)
  })
  it('a door: down at once, back with its time constant', () => {
    const x = load({ kind: 'pulses', at: [10], widthS: 5, size: -8, recoveryS: 10 }, 60, 1)
    expect([x[9], x[10], x[14]]).toEqual([0, -8, -8])
    expect(x[25]).toBeCloseTo(-8 * Math.exp(-1), 9)
  })
})

describe('fillSetpoint', () => {
  it('holds and ramps', () => {
    const out = new Float64Array(8)
    fillSetpoint({ kind: 'points', start: 10, points: [{ at: 2, value: 20, ramp: false }, { at: 6, value: 40, ramp: true }] }, out, 1)
    expect([...out]).toEqual([10, 10, 20, 25, 30, 35, 40, 40])
  })
  it('interpolates a signal', () => {
    const out = new Float64Array(5)
    fillSetpoint({ kind: 'signal', values: [0, 4, 4], stepS: 2 }, out, 1)
    expect([...out]).toEqual([0, 2, 4, 4, 4])
  })
})

describe('idealTuning', () => {
  it('series settings (8 s, 4 s, gain 1) are ideal 1.5, 12 s, 2.667 s (formula of Åström, Hägglund 2006)', () => {
    const ideal = idealTuning('series', 1, 8, 4)
    expect(ideal.controllerGain).toBeCloseTo(1.5, 12)
    expect(ideal.integralTime).toBeCloseTo(12, 12)
    expect(ideal.derivativeTime).toBeCloseTo(8 / 3, 12)
    expect(idealTuning('ideal', 2, null, null)).toEqual({ controllerGain: 2, integralTime: Infinity, derivativeTime: 0 })
  })
})
