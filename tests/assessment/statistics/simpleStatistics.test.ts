import { median, quantileSorted, sampleCorrelation, sampleVariance, mean as theirMean } from 'simple-statistics'
import { describe, expect, it } from 'vitest'
import { crossCorrelation } from '../../../shared/assessment/statistics/crossCorrelation'
import { mean } from '../../../shared/assessment/statistics/mean'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { select } from '../../../shared/assessment/statistics/select'
import { variance } from '../../../shared/assessment/statistics/variance'

/** Outside reference: the library simple-statistics 7 (ISC licence), on seeded records with offset, ties and outliers. */
const random = seededRandom(2026)
const records: [string, Float64Array][] = [
  ['normal with an offset of a million', Float64Array.from({ length: 5001 }, () => 1e6 + random.normal())],
  ['whole numbers with many ties', Float64Array.from({ length: 1000 }, () => random.integer(7))],
  ['a few outliers', Float64Array.from({ length: 333 }, (_, k) => (k % 97 === 0 ? 1e4 : random.normal()))],
  ['two values', Float64Array.of(3, -1)],
]

describe.each(records)('against simple-statistics: %s', (_, x) => {
  const plain = Array.from(x)
  const sorted = [...plain].sort((a, b) => a - b)
  it('mean and sample variance', () => {
    expect(Math.abs(mean(x) - theirMean(plain))).toBeLessThanOrEqual(1e-12 * Math.max(1, Math.abs(theirMean(plain))))
    expect(Math.abs(variance(x) / sampleVariance(plain) - 1)).toBeLessThan(1e-9)
  })
  it('the value of a rank, for every tenth rank, the first and the last', () => {
    for (let k = 0; k < x.length; k += Math.max(1, Math.floor(x.length / 10))) expect(select(x.slice(), k)).toBe(sorted[k])
    expect(select(x.slice(), x.length - 1)).toBe(quantileSorted(sorted, 1))
  })
  it('the median of an odd number of values', () => {
    const odd = x.length % 2 ? x : x.subarray(0, x.length - 1)
    expect(select(odd.slice(), odd.length >> 1)).toBe(median(Array.from(odd)))
  })
})

it('correlation at lag 0 is the ordinary one', () => {
  const a = Float64Array.from({ length: 800 }, () => random.normal())
  const b = a.map(v => 0.6 * v + random.normal())
  expect(crossCorrelation(a, b, 3)[3]).toBeCloseTo(sampleCorrelation(Array.from(a), Array.from(b)), 12)
})
