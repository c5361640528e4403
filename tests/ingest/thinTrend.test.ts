import { describe, expect, it } from 'vitest'
import type { DaySamples } from '../../db/blocks/types'
import { thinTrend } from '../../server/services/loops/thinTrend'
import { seededRandom } from '../../shared/assessment/statistics/seededRandom'

const record = (n: number, part: Partial<DaySamples> = {}): DaySamples => ({
  t: Float64Array.from({ length: n }, (_, i) => i * 1000), pv: Float64Array.from({ length: n }, (_, i) => i), sp: null, op: null, mode: null, modeNames: [], ...part,
})

describe('thinning a trend', () => {
  it('leaves a short record as it is', () => {
    const thin = thinTrend(record(50, { mode: new Uint8Array(50), modeNames: ['AUTO'] }), 100)
    expect(thin.t).toEqual(Array.from({ length: 50 }, (_, i) => i * 1000))
    expect(thin.mode[7]).toBe('AUTO')
    expect(thin.sp).toEqual(new Array(50).fill(null))
  })

  it('never gives more points than asked for, keeps every peak, and only shows samples that are there', () => {
    const random = seededRandom(4)
    for (const n of [3000, 20_000, 60_480]) {
      const noise = () => Float64Array.from({ length: n }, () => random.normal())
      const pv = noise()
      const op = noise()
      pv[1234] = 50
      pv[2345] = -50
      op[777] = 40
      const sp = Float64Array.from({ length: n }, (_, i) => i > 2000 ? 5 : 4)
      for (const points of [10, 200, 1500, 2000]) {
        const thin = thinTrend(record(n, { pv, op, sp }), points)
        expect(thin.t.length).toBeLessThanOrEqual(points)
        expect(thin.t.length).toBeGreaterThan(points * 0.4)
        expect([Math.max(...thin.pv as number[]), Math.min(...thin.pv as number[]), Math.max(...thin.op as number[])]).toEqual([50, -50, 40])
        thin.t.forEach((t, k) => expect([thin.pv[k], thin.op[k], thin.sp[k]]).toEqual([pv[t / 1000], op[t / 1000], sp[t / 1000]]))
        expect(thin.t.every((t, k) => k === 0 || t > thin.t[k - 1])).toBe(true)
      }
    }
  })

  it('draws a gap as a gap', () => {
    const t = Float64Array.from({ length: 4000 }, (_, i) => (i < 2000 ? i : i + 3000) * 1000)
    for (const points of [300, 2000]) {
      const thin = thinTrend(record(4000, { t }), points)
      const hole = thin.t.findIndex((_, k) => thin.pv[k] === null)
      expect(thin.t[hole]).toBe(1_999_001)
      expect([thin.pv[hole - 1], thin.pv[hole + 1]]).toEqual([1999, 2000])
    }
  })

  it('a record without anything, or with nothing but missing values, is no error', () => {
    expect(thinTrend(record(0), 100).t).toEqual([])
    expect(thinTrend(record(5000, { pv: new Float64Array(5000).fill(NaN) }), 100).pv.every(v => v === null)).toBe(true)
  })
})
