import { describe, expect, it } from 'vitest'
import { spectralPeaks } from '../../../shared/assessment/oscillation/spectralPeaks'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'

// Long periods are looked for in a record thinned by 2, 4, 8, …; the answers follow from the sampling theorem.
const n = 60_000
const present = new Uint8Array(n).fill(1)
function stepsOf(signal: (i: number) => number, deviation: number): Float64Array {
  const random = seededRandom(5)
  let before = 0
  return Float64Array.from({ length: n }, (_, i) => { const now = signal(i) + deviation * random.normal(); const step = i ? now - before : 0; before = now; return step })
}

describe('peaks of the spectrum', () => {
  it.each([9, 40, 170, 700, 1500])('a sine of %i samples as large as the noise is the strongest, at its own frequency', (period) => {
    const [peak] = spectralPeaks(stepsOf(i => Math.sqrt(2) * Math.sin(2 * Math.PI * i / period), 1), present, 1440 * 3)
    expect(Math.abs(peak!.frequency * period - 1)).toBeLessThan(0.03)
  })
  it.each([0.43, 0.453, 0.47, 0.49, 0.4975])('a fast tone of %f cycles a sample, ten times the noise, is not folded down into a slow one', (frequency) => {
    const slow = (size: number) => spectralPeaks(stepsOf(i => size * Math.SQRT2 * Math.cos(2 * Math.PI * frequency * i), 1), present, 1440 * 3).filter(p => p.frequency < 0.2).map(p => p.frequency)
    const alone = slow(0), beside = slow(10)
    // what stands out of the noise by chance stays as it is, and nothing joins it
    expect(beside).toHaveLength(alone.length)
    beside.forEach((f, i) => expect(f / alone[i]!).toBeCloseTo(1, 2))
  })
  it('a week of a trend without noise has none', () => {
    expect(spectralPeaks(stepsOf(i => i / 100, 0), present, 1440)).toEqual([])
  })
  it('leaves its inputs alone', () => {
    const steps = stepsOf(i => Math.sin(i / 30), 1)
    const before = steps.slice()
    spectralPeaks(steps, present, 1440)
    expect(steps).toEqual(before)
    expect(present.every(v => v === 1)).toBe(true)
  })
})
