import { describe, expect, it } from 'vitest'
import { compressTrend } from '../../../shared/assessment/simulation/compressTrend'
import { noiseSource } from '../../../shared/assessment/simulation/noiseSource'

const kept = (...args: Parameters<typeof compressTrend>) => [...compressTrend(...args)].flatMap((k, i) => k ? [i] : [])
const times = (n: number) => Array.from({ length: n }, (_, i) => i)

describe('compressTrend', () => {
  it('swinging door: a straight line needs its ends, a corner one more (by hand from Bristol 1990)', () => {
    expect(kept('swingingDoor', times(11), times(11).map(i => 3 * i), 0.5, 1e9)).toEqual([0, 10])
    expect(kept('swingingDoor', times(11), times(11).map(i => Math.max(0, i - 5)), 0.1, 1e9)).toEqual([0, 5, 10])
  })

  it('boxcar: a staircase keeps the last of each step and the first outside (by hand from Hale, Sellars 1981)', () => {
    expect(kept('boxcar', times(9), [0, 0, 0, 5, 5, 5, 9, 9, 9], 1, 1e9)).toEqual([0, 2, 3, 5, 6, 8])
  })

  it('archives at least every longestS', () => {
    expect(kept('swingingDoor', times(11), times(11).fill(7), 1, 4)).toEqual([0, 4, 8, 10])
  })

  it.each(['boxcar', 'swingingDoor'] as const)('%s: the interpolated record stays within twice the deviation', (technique) => {
    const noise = noiseSource(4)
    let level = 0
    const x = times(5000).map(() => level += 0.2 * noise.normal())
    const index = kept(technique, times(5000), x, 1, 1e9)
    expect(index.length).toBeLessThan(1500)
    for (let j = 1; j < index.length; j++) {
      const [a, b] = [index[j - 1], index[j]]
      for (let i = a; i <= b; i++) expect(Math.abs(x[a] + (x[b] - x[a]) * (i - a) / (b - a) - x[i])).toBeLessThanOrEqual(2.0001)
    }
  })

  it('keeps missing values and their neighbours, and nothing of nothing', () => {
    expect(kept('boxcar', times(5), [1, 1, NaN, 1, 1], 1, 1e9)).toEqual([0, 1, 2, 3, 4])
    expect(kept('boxcar', [], [], 1, 1)).toEqual([])
  })

  it('refuses lengths that differ and a negative deviation', () => {
    expect(() => compressTrend('boxcar', [0], [0, 1], 1, 1)).toThrow(/one length/)
    expect(() => compressTrend('boxcar', [0], [0], -1, 1)).toThrow(/deviation/)
  })
})
