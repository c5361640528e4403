import { describe, expect, it } from 'vitest'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { cycleShape } from '../../../shared/assessment/verdict/cycleShape'

const n = 6000
const period = 60
const wave = (f: (phase: number) => number) => Float64Array.from({ length: n }, (_, i) => f(((i + 0.5) / period) % 1))
const sine = wave(p => Math.sin(2 * Math.PI * p))
const square = wave(p => (p < 0.5 ? 1 : -1))
const triangle = wave(p => 1 - 4 * Math.abs(((p + 0.25) % 1) - 0.5))

describe('cycleShape', () => {
  // closed forms: third harmonic in step with the first, relative to it: square +1/3, triangle -1/9, sine 0;
  // odd harmonics 3 and 5: sqrt(1/9 + 1/25), sqrt(1/81 + 1/625), 0 (Fourier series)
  it.each([['sine', sine, 0, 0], ['square', square, 1 / 3, Math.hypot(1 / 3, 1 / 5)], ['triangle', triangle, -1 / 9, Math.hypot(1 / 9, 1 / 25)]] as const)('reads the harmonics of a %s', (_, x, third, odd) => {
    const s = cycleShape(x, sine, period)!
    expect(s.pvThird).toBeCloseTo(third, 2)
    expect(s.pvOdd).toBeCloseTo(odd, 2)
    expect(s.pvEven).toBeCloseTo(0, 2)
    expect(s.opThird).toBeCloseTo(0, 2)
    expect(s.pvCoherence).toBeGreaterThan(0.93)
    expect(s.amplitudeVariation).toBeLessThan(0.01)
    expect(s.phaseWander).toBeLessThan(0.01)
  })

  it('sees even harmonics of a sawtooth-like wave: second half the first', () => {
    const s = cycleShape(wave(p => Math.sin(2 * Math.PI * p) + 0.5 * Math.sin(4 * Math.PI * p)), null, period)!
    expect(s.pvEven).toBeCloseTo(0.5, 2)
    expect(s.opThird).toBeNaN()
  })

  it('gives noise through a resonance the amplitude variation of a Rayleigh variable, and a straying beat', () => {
    // AR(2), damping about 0.08: sd / mean of a Rayleigh variable is sqrt(4 / pi - 1) = 0.523
    const random = seededRandom(21)
    const r = Math.exp(-0.08 * 2 * Math.PI / period)
    const x = new Float64Array(30_000)
    for (let i = 2; i < x.length; i++) x[i] = 2 * r * Math.cos(2 * Math.PI / period) * x[i - 1] - r * r * x[i - 2] + random.normal()
    const s = cycleShape(x, null, period)!
    expect(s.amplitudeVariation).toBeGreaterThan(0.35)
    expect(s.amplitudeVariation).toBeLessThan(0.7)
    expect(s.phaseWander).toBeGreaterThan(0.1)
  })

  it('keeps its reading under noise, drift and scale', () => {
    const random = seededRandom(4)
    const x = square.map((v, i) => 10 * v + random.normal() + i * 0.002)
    const s = cycleShape(x, triangle, period)!
    expect(s.pvThird).toBeCloseTo(1 / 3, 1)
    expect(s.opThird).toBeCloseTo(-1 / 9, 2)
    expect(s.pvAmplitude).toBeCloseTo(40 / Math.PI, 0)
  })

  it('needs six periods, and leaves its inputs alone', () => {
    expect(cycleShape(sine.subarray(0, 300), null, period)).toBeNull()
    const copy = sine.slice()
    cycleShape(sine, sine, period)
    expect(sine).toEqual(copy)
    expect(() => cycleShape(sine, null, 1)).toThrow(RangeError)
  })
})
