import { describe, expect, it } from 'vitest'
import { detectOscillations } from '../../../shared/assessment/oscillation/detectOscillations'
import { seededRandom, type SeededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { referenceSignal } from '../valve/referenceSignals'

/** Full run: FETTLE_SEEDS=1000 npx vitest run tests/assessment/oscillation/detectOscillations.test.ts */
const SEEDS = Number(process.env.FETTLE_SEEDS ?? 30)
const wave = (length: number, seed: number, make: (k: number, random: SeededRandom) => number) => {
  const random = seededRandom(seed)
  return Float64Array.from({ length }, (_, k) => make(k, random))
}
const sine = (k: number, period: number, phase = 0) => Math.sin(2 * Math.PI * k / period + phase)
const square = (k: number, period: number) => Math.sign(sine(k + 0.25, period))
const triangle = (k: number, period: number) => 2 / Math.PI * Math.asin(sine(k + 0.5, period))
const detect = (x: Float64Array, more = {}) => detectOscillations(x, { sampleIntervalS: 1, minimumAmplitude: 0.05, ...more })

/** White noise through 1 / (1 - a q^-1 + b q^-2); invented inputs, the truth is in how they are made. */
function autoregressive(a: number, b: number) {
  let one = 0, two = 0
  return (_k: number, random: SeededRandom) => { const next = a * one - b * two + random.normal(); two = one; one = next; return next }
}
function resonance(damping: number, period: number) {
  const w = 2 * Math.PI / period, r = Math.exp(-damping * w)
  return autoregressive(2 * r * Math.cos(w * Math.sqrt(1 - damping * damping)), r * r)
}

describe('what is there is found: reference signals of fixtures/reference/scripts/oscillation.py', () => {
  for (const name of ['sine60_noise', 'sine60_clean', 'square60', 'triangle60']) {
    it(`${name}: one oscillation of 60 samples`, () => {
      const found = detect(referenceSignal(`osc_${name}`).e!)
      expect(found).toHaveLength(1)
      expect(Math.abs(found[0]!.periodS / 60 - 1)).toBeLessThan(0.02)
      expect(found[0]!.amplitude).toBeGreaterThan(0.9)
      expect(found[0]!.amplitude).toBeLessThan(1.1)
      expect(found[0]!.regularity).toBeGreaterThan(1)
      expect(found[0]!.strength).toBeGreaterThan(0.8)
    })
  }
  it('two_sines: both, with their amplitudes 1 and 0.7', () => {
    const found = detect(referenceSignal('osc_two_sines').e!)
    expect(found.map(o => Math.round(o.periodS))).toEqual([60, 17])
    expect(found[0]!.amplitude).toBeCloseTo(1, 1)
    expect(found[1]!.amplitude).toBeCloseTo(0.7, 1)
  })
  it('damped_sine: found, and ended before the record does', () => {
    const found = detect(referenceSignal('osc_damped_sine').e!)
    expect(found).toHaveLength(1)
    expect(Math.abs(found[0]!.periodS / 60 - 1)).toBeLessThan(0.02)
    expect(found[0]!.episodes[0]!.toMs).toBeLessThan(2_000_000)
  })
  it('ar2_zeta0.1, a lightly damped resonance: found about its damped period of 60.3', () => {
    const [found] = detect(wave(20_000, 3, resonance(0.1, 60)))
    expect(Math.abs(found!.periodS / 60.3 - 1)).toBeLessThan(0.06)
  })
  for (const name of ['white', 'ar1_0.9']) it(`${name}: nothing`, () => expect(detect(referenceSignal(`osc_${name}`).e!, { minimumAmplitude: 0 })).toEqual([]))
})

describe('what is there is found: made signals with known truth', () => {
  it('buried in noise of three times its variance', () => {
    const [found, ...more] = detect(wave(20_000, 1, (k, random) => sine(k, 37) + 1.25 * random.normal()))
    expect(Math.abs(found!.periodS / 37 - 1)).toBeLessThan(0.005)
    expect(found!.strength).toBeGreaterThan(0.2)
    expect(found!.strength).toBeLessThan(0.3)
    expect(more).toEqual([])
  })
  it('two within a third of an octave', () => {
    const found = detect(wave(20_000, 2, (k, random) => sine(k, 60) + sine(k, 45) + 0.2 * random.normal()))
    expect(found.map(o => Math.round(o.periodS)).sort()).toEqual([45, 60])
  })
  it('8 h of 168 h, at one minute: begin and end within one period', () => {
    for (let seed = 1; seed <= 10; seed++) {
      const from = 1000 * seed - 500, t0Ms = 1_700_000_000_000
      const x = wave(10_080, seed, (k, random) => (k >= from && k < from + 480 ? sine(k, 20, seed) : 0) + 0.3 * random.normal())
      const found = detect(x, { sampleIntervalS: 60, t0Ms })
      expect(found).toHaveLength(1)
      expect(Math.abs(found[0]!.periodS / 1200 - 1)).toBeLessThan(0.02)
      expect(found[0]!.episodes).toHaveLength(1)
      const [{ fromMs, toMs }] = found[0]!.episodes as [{ fromMs: number, toMs: number }]
      expect(Math.abs(fromMs - t0Ms - from * 60_000)).toBeLessThan(1_200_000)
      expect(Math.abs(toMs - t0Ms - (from + 480) * 60_000)).toBeLessThan(1_200_000)
    }
  })
  it('two stretches are two episodes, a gap splits them too', () => {
    const on = (k: number) => (k >= 3000 && k < 5000) || (k >= 12_000 && k < 14_500)
    const twice = detect(wave(20_000, 4, (k, random) => (on(k) ? square(k, 50) : 0) + 0.2 * random.normal()))
    expect(twice).toHaveLength(1)
    expect(twice[0]!.episodes.map(e => [Math.round(e.fromMs / 50_000), Math.round(e.toMs / 50_000)])).toEqual([[60, 100], [240, 290]])
    const gap = detect(wave(20_000, 5, (k, random) => k >= 8000 && k < 10_000 ? Number.NaN : triangle(k, 50) + 0.1 * random.normal()))
    expect(gap).toHaveLength(1)
    expect(gap[0]!.episodes.map(e => [Math.round(e.fromMs / 50_000), Math.round(e.toMs / 50_000)])).toEqual([[0, 160], [200, 400]])
  })
  it('harmonics of square and triangle waves of any period are not oscillations of their own; the period is right within 2 %', () => {
    const random = seededRandom(6)
    for (let i = 0; i < 30; i++) {
      const period = 8 * 20 ** random.uniform()
      const found = detect(wave(8000, 100 + i, (k, r) => (i % 2 ? square : triangle)(k, period) + 0.2 * r.normal()))
      expect(found, `period ${period}`).toHaveLength(1)
      expect(Math.abs(found[0]!.periodS / period - 1)).toBeLessThan(0.02)
    }
  })
})

describe(`false alarms in ${SEEDS} seeds each, with no smallest amplitude to help`, () => {
  const cases: Record<string, [number, () => (k: number, random: SeededRandom) => number]> = {
    'white noise': [1, () => (_k, random) => random.normal()],
    'first-order autoregression 0.9': [1, () => autoregressive(0.9, 0)],
    'first-order autoregression 0.98': [1, () => autoregressive(0.98, 0)],
    'random walk': [1, () => autoregressive(1, 0)],
    'noise with a single step': [1, () => (k, random) => (k > 777 ? 20 : 0) + random.normal()],
    'the rhythm of the day at 30 s': [30, () => (k, random) => 10 * sine(k, 2880) + 3 * sine(k, 1440) + random.normal()],
    'noise through a well damped loop': [1, () => resonance(0.5, 60)],
  }
  for (const [name, [sampleIntervalS, make]] of Object.entries(cases)) {
    it(`${name}: below 1 %`, () => {
      let alarms = 0
      for (let seed = 1; seed <= SEEDS; seed++) alarms += detect(wave(seed % 2 ? 3000 : 12_000, seed, make()), { sampleIntervalS, minimumAmplitude: 0 }).length ? 1 : 0
      expect(alarms).toBeLessThan(Math.max(1, 0.01 * SEEDS))
    }, 600_000)
  }
})

describe('invariance, degenerate, misuse', () => {
  const x = wave(4000, 8, (k, random) => sine(k, 40) + 0.3 * random.normal())
  it('shift and scale: same period and times, scaled amplitude', () => {
    const [plain] = detect(x)
    const [changed] = detect(x.map(v => 1000 - 20 * v), { minimumAmplitude: 1 })
    expect(changed!.periodS).toBeCloseTo(plain!.periodS, 6)
    expect(changed!.amplitude / 20).toBeCloseTo(plain!.amplitude, 6)
    expect(changed!.episodes).toEqual(plain!.episodes)
  })
  it('sampling interval scales times', () => {
    expect(detect(x, { sampleIntervalS: 10 })[0]!.periodS).toBeCloseTo(10 * detect(x)[0]!.periodS, 6)
  })
  it('below the smallest amplitude or the noise it is not reported', () => {
    expect(detect(x, { minimumAmplitude: 1.2 })).toEqual([])
    expect(detect(x, { noiseLevel: 1.2 })).toEqual([])
  })
  it('nothing in constants, gaps and short records', () => {
    for (const y of [new Float64Array(0), new Float64Array(1000), new Float64Array(1000).fill(Number.NaN), x.subarray(0, 63), Float64Array.of(1, 2)]) expect(detect(y)).toEqual([])
  })
  it('refuses wrong options', () => {
    expect(() => detect(x, { sampleIntervalS: 0 })).toThrow(/sampleIntervalS/)
    expect(() => detect(x, { minimumAmplitude: -1 })).toThrow(/minimumAmplitude/)
  })
  it('leaves its input alone', () => {
    const before = x.slice()
    detect(x)
    expect(x).toEqual(before)
  })
})
