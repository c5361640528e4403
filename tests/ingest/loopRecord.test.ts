import { describe, expect, it } from 'vitest'
import { encodeBlock } from '../../db/blocks/encodeBlock'
import type { DaySamples } from '../../db/blocks/types'
import { loopRecord } from '../../server/services/assessments/loopRecord'
import { MODE_UNKNOWN } from '../../shared/assessment/types'

const DAY = Date.UTC(2026, 10, 23)
const block = (part: Partial<DaySamples> & { t: Float64Array }) => encodeBlock(1, { pv: null, sp: null, op: null, mode: null, modeNames: [], ...part })
const grid = (n: number, from = DAY, step = 10_000) => Float64Array.from({ length: n }, (_, i) => from + i * step)
const fill = (n: number, f: (i: number) => number) => Float64Array.from({ length: n }, (_, i) => f(i))

describe('blocks as one record', () => {
  it('joins days, cuts to the span, and fills signals and modes that a day has not', () => {
    const next = DAY + 86_400_000
    const record = loopRecord([
      block({ t: grid(5, next - 50_000), pv: fill(5, i => i), mode: Uint8Array.of(0, 0, 1, 1, 1), modeNames: ['MAN', 'AUTO'] }),
      block({ t: grid(5, next), pv: fill(5, i => 10 + i), sp: fill(5, () => 7), mode: Uint8Array.of(0, 0, 0, 1, 1), modeNames: ['AUTO', 'CAS'] }),
    ], next - 30_000, next + 40_000, ['AUTO'])
    expect(Array.from(record.t)).toEqual([-3, -2, -1, 0, 1, 2, 3].map(k => next + k * 10_000))
    expect(Array.from(record.pv)).toEqual([2, 3, 4, 10, 11, 12, 13])
    expect(Array.from(record.sp!)).toEqual([NaN, NaN, NaN, 7, 7, 7, 7])
    expect(record.op).toBeNull()
    expect(Array.from(record.mode!, code => record.modeNames[code])).toEqual(['AUTO', 'AUTO', 'AUTO', 'AUTO', 'AUTO', 'AUTO', 'CAS'])
  })

  it('a set point and a mode that are reported only when they change hold until they do', () => {
    const n = 60
    const at = (values: Record<number, number>, none: number) => Array.from({ length: n }, (_, i) => values[i] ?? none)
    const record = loopRecord([block({ t: grid(n), pv: fill(n, i => i), op: fill(n, i => (i === 7 ? NaN : 50)), sp: Float64Array.from(at({ 0: 5, 30: 6 }, NaN)), mode: Uint8Array.from(at({ 0: 0, 40: 1 }, MODE_UNKNOWN)), modeNames: ['AUTO', 'MAN'] })], DAY, DAY + 1e9, ['AUTO'])
    expect(Array.from(record.sp!)).toEqual(Array.from({ length: n }, (_, i) => i < 30 ? 5 : 6))
    expect(Array.from(record.mode!)).toEqual(Array.from({ length: n }, (_, i) => i < 40 ? 0 : 1))
    // a single missing value among many is a gap and stays one
    expect(record.op![7]).toBeNaN()
  })

  it('signals with times of their own are put onto the times of PV', () => {
    const n = 100
    const t = grid(2 * n, DAY, 5000)
    const record = loopRecord([block({ t, pv: fill(2 * n, i => i % 2 ? NaN : i), op: fill(2 * n, i => i % 2 ? i : NaN) })], DAY, DAY + 1e9, [])
    expect(Array.from(record.t)).toEqual(Array.from(grid(n)))
    expect(Array.from(record.op!.subarray(1))).toEqual(Array.from({ length: n - 1 }, (_, k) => 2 * k + 1))
  })

  it('a bad PV on shared times stays missing', () => {
    const record = loopRecord([block({ t: grid(50), pv: fill(50, i => i > 20 && i < 35 ? NaN : 1), op: fill(50, () => 40), sp: fill(50, () => 1) })], DAY, DAY + 1e9, [])
    expect(record.t.length).toBe(50)
    expect(record.pv[25]).toBeNaN()
  })

  it('a mode that is a number says nothing unless the set-up names it', () => {
    const blocks = [block({ t: grid(4), pv: fill(4, () => 1), mode: Uint8Array.of(0, 1, 1, 0), modeNames: ['0', '1'] })]
    expect(Array.from(loopRecord(blocks, DAY, DAY + 1e9, ['AUTO']).mode!)).toEqual([255, 255, 255, 255])
    expect(Array.from(loopRecord(blocks, DAY, DAY + 1e9, ['1']).mode!)).toEqual([255, 1, 1, 255])
  })
})
