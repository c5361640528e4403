import { describe, expect, it } from 'vitest'
import { bandPass } from '../../../shared/assessment/spectrum/bandPass'
import { fft } from '../../../shared/assessment/spectrum/fft'
import { welchSpectrum } from '../../../shared/assessment/spectrum/welchSpectrum'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { variance } from '../../../shared/assessment/statistics/variance'
import { largestDifference, referenceCases, signal } from '../statistics/reference'

const library = [...referenceCases('library-values')]
const sine = (n: number, period: number, phase = 0) => Float64Array.from({ length: n }, (_, t) => Math.sin(2 * Math.PI * t / period + phase))

describe('fft', () => {
  it.each(library.filter(([id]) => id.startsWith('fft_')))('%s equals numpy.fft, and comes back', (_, { inputs, expected }) => {
    const x = Float64Array.from(inputs.x)
    const n = x.length
    const X = new Float64Array(2 * n)
    fft(n).forward(x, X)
    expect(largestDifference(X.filter((_, i) => i % 2 === 0), expected.re)).toBeLessThan(1e-12)
    expect(largestDifference(X.filter((_, i) => i % 2 === 1), expected.im)).toBeLessThan(1e-12)
    const half = new Float64Array(2 * n)
    fft(n).forwardHalf(x, half)
    const bins = 2 * (Math.floor(n / 2) + 1)
    expect(largestDifference(half.subarray(0, bins).filter((_, i) => i % 2 === 0), expected.re.slice(0, bins / 2))).toBeLessThan(1e-12)
    expect(largestDifference(half.subarray(0, bins).filter((_, i) => i % 2 === 1), expected.im.slice(0, bins / 2))).toBeLessThan(1e-12)
    const back = new Float64Array(2 * n)
    fft(n).inverse(X, back)
    expect(largestDifference(back.filter((_, i) => i % 2 === 0), x)).toBeLessThan(1e-13)
    expect(x).toEqual(Float64Array.from(inputs.x))
  })
  it('refuses sizes and lengths that do not fit', () => {
    expect(() => fft(1)).toThrow('got 1')
    expect(() => fft(8).forward(new Float64Array(7), new Float64Array(16))).toThrow('length 8, got 7')
    expect(() => fft(9).inverse(new Float64Array(18), new Float64Array(9))).toThrow('length 18, got 9')
  })
})

describe('welchSpectrum', () => {
  it.each(library.filter(([id]) => id.startsWith('welch_')))('%s equals scipy.signal.welch', (_, { inputs, expected }) => {
    const { frequencyHz, power } = welchSpectrum(signal(inputs.csv), inputs)
    expect(largestDifference(frequencyHz, expected.frequencyHz)).toBeLessThan(1e-15)
    const largest = Math.max(...expected.power)
    expect(largestDifference(power, expected.power) / largest).toBeLessThan(1e-13)
  })
  it('has the variance of white noise under it, and 2 var dt at every frequency', () => {
    const g = seededRandom(4)
    const x = Float64Array.from({ length: 65536 }, () => 3 * g.normal())
    const { frequencyHz, power, segments } = welchSpectrum(x, { sampleIntervalS: 5, segmentLength: 256 })
    let area = 0
    for (let k = 0; k < power.length; k++) area += power[k] * frequencyHz[1]
    expect(area / variance(x)).toBeCloseTo(1, 1)
    expect(segments).toBe(511)
  })
  it('puts the power A^2/2 of a sine at its frequency', () => {
    const { frequencyHz, power } = welchSpectrum(sine(4096, 32).map(v => 4 * v + 100), { sampleIntervalS: 10, segmentLength: 512 })
    const at = power.indexOf(Math.max(...power))
    expect(frequencyHz[at]).toBeCloseTo(1 / 320, 12)
    expect(power.reduce((s, p) => s + p, 0) * frequencyHz[1]).toBeCloseTo(8, 6)
  })
  it('is zero for a constant', () => {
    expect(Math.max(...welchSpectrum(new Float64Array(100).fill(7), { sampleIntervalS: 1, segmentLength: 50 }).power)).toBeLessThan(1e-25)
  })
  it('refuses what it cannot do and leaves its input alone', () => {
    const x = sine(100, 10)
    const before = x.slice()
    welchSpectrum(x, { sampleIntervalS: 1, segmentLength: 32 })
    expect(x).toEqual(before)
    expect(() => welchSpectrum(x, { sampleIntervalS: 0, segmentLength: 32 })).toThrow('sampleIntervalS')
    expect(() => welchSpectrum(x, { sampleIntervalS: 1, segmentLength: 101 })).toThrow('segmentLength')
    expect(() => welchSpectrum(x, { sampleIntervalS: 1, segmentLength: 32, overlapFraction: 1 })).toThrow('overlapFraction')
    expect(() => welchSpectrum(Float64Array.of(1, 2, NaN, 4), { sampleIntervalS: 1, segmentLength: 4 })).toThrow('x[2]')
  })
})

describe('bandPass', () => {
  const n = 3000
  const slow = sine(n, 500, 0.4)
  const middle = sine(n, 60, 1)
  const fast = sine(n, 11, 2)
  const all = slow.map((v, t) => 12 + 3 * v + middle[t] + 2 * fast[t])
  const band = { sampleIntervalS: 2, lowHz: 1 / 180, highHz: 1 / 80 }
  const inner = (x: Float64Array) => x.subarray(270, n - 270)

  it('takes the sine of the band out of the sum, without delay', () => {
    expect(largestDifference(inner(bandPass(all, band)), inner(middle))).toBeLessThan(0.03)
  })
  it('is as low-pass and high-pass what is left', () => {
    expect(largestDifference(inner(bandPass(all, { sampleIntervalS: 2, lowHz: 0, highHz: 1 / 500 })), inner(slow.map(v => 3 * v)))).toBeLessThan(0.2)
    expect(largestDifference(inner(bandPass(all, { sampleIntervalS: 2, lowHz: 1 / 40, highHz: 1 })), inner(fast.map(v => 2 * v)))).toBeLessThan(0.06)
  })
  it('is linear, blind to the mean, and the same backwards', () => {
    const y = bandPass(all, band)
    expect(largestDifference(bandPass(all.map(v => 90 - 2 * v), band), y.map(v => -2 * v))).toBeLessThan(1e-10)
    expect(largestDifference(bandPass(all.slice().reverse(), band).reverse(), y)).toBeLessThan(1e-10)
  })
  it('gives zeros for a constant, does not throw up a ramp, leaves its input alone', () => {
    expect(Math.max(...bandPass(new Float64Array(500).fill(0.1), band))).toBeLessThan(1e-15)
    const ramp = Float64Array.from({ length: n }, (_, t) => t / 100)
    expect(Math.max(...inner(bandPass(ramp, band)).map(Math.abs))).toBeLessThan(0.3)
    const before = ramp.slice()
    bandPass(ramp, band)
    expect(ramp).toEqual(before)
  })
  it('refuses empty bands, NaN and too short records', () => {
    expect(() => bandPass(all, { ...band, highHz: 1 / 200 })).toThrow('lowHz < highHz')
    expect(() => bandPass(Float64Array.of(1, 2, NaN, 4), band)).toThrow('x[2]')
    expect(() => bandPass(new Float64Array(3), band)).toThrow('got 3')
  })
})
