import { describe, expect, it } from 'vitest'
import { appendBlock } from '../../db/blocks/appendBlock'
import { decodeBlock } from '../../db/blocks/decodeBlock'
import { decodeColumn } from '../../db/blocks/decodeColumn'
import { encodeBlock } from '../../db/blocks/encodeBlock'
import { encodeColumn } from '../../db/blocks/encodeColumn'
import { mergeBlock } from '../../db/blocks/mergeBlock'
import { mergeSamples } from '../../db/blocks/mergeSamples'
import { MODE_UNKNOWN, type DaySamples } from '../../db/blocks/types'
import { seededRandom } from '../../shared/assessment/statistics/seededRandom'

const back = (values: number[]) => Array.from(decodeColumn(encodeColumn(Float64Array.from(values)), values.length))
const DAY = Date.UTC(2026, 10, 23)
const day = (part: Partial<DaySamples> & { t: Float64Array }): DaySamples => ({ pv: null, sp: null, op: null, mode: null, modeNames: [], ...part })
const grid = (n: number, from = DAY, step = 10_000) => Float64Array.from({ length: n }, (_, i) => from + i * step)

describe('a column comes back equal', () => {
  const cases: Record<string, number[]> = {
    'short decimals': [20.1, 20.2, 20.15, 19.999, -3.5, 0, 0.1],
    'missing values': [NaN, 1, NaN, NaN, 2, NaN],
    'all missing': [NaN, NaN, NaN],
    'constant': [7.25, 7.25, 7.25],
    'one value': [1e-300],
    'values that are no short decimals among many that are': [...Array.from({ length: 40 }, (_, i) => i / 10), Math.PI, 1 / 3, 5],
    'no short decimals at all': [Math.PI, Math.E, Math.SQRT2, 1 / 3],
    'the ends of the doubles': [Number.MAX_VALUE, -Number.MAX_VALUE, Number.MIN_VALUE, 2 ** 53, -(2 ** 53), 2 ** 50, 2 ** 50 - 1, 1 - 2 ** 50, 0.5],
    'jumps of a size that needs many bytes': [0, 2 ** 49, -(2 ** 49), 2 ** 49, 0, 1, 2 ** 31, 2 ** 32, -(2 ** 33)],
    'each length of a varint': Array.from({ length: 48 }, (_, i) => 2 ** i + 1),
  }
  for (const [name, values] of Object.entries(cases)) it(name, () => expect(back(values)).toEqual(values))

  it('random walks of random decimals', () => {
    const random = seededRandom(1).uniform
    for (let round = 0; round < 60; round++) {
      const decimals = Math.floor(random() * 12)
      const size = 10 ** (random() * 10 - 2)
      let level = (random() - 0.5) * size
      const values = Array.from({ length: 1 + Math.floor(random() * 400) }, () => {
        level += (random() - 0.5) * size * 0.01
        const u = random()
        return u < 0.02 ? NaN : u < 0.03 ? random() : Number(level.toFixed(decimals))
      }).map(v => v === 0 ? 0 : v)
      expect(back(values)).toEqual(values)
    }
  })

  it('several segments in a row are one column', () => {
    const a = encodeColumn(Float64Array.of(1, 2, 3))
    const b = encodeColumn(Float64Array.of(NaN, NaN))
    const c = encodeColumn(Float64Array.of(0.25, 0.5, 1e9))
    expect(Array.from(decodeColumn(Buffer.concat([a, b, c]), 8))).toEqual([1, 2, 3, NaN, NaN, 0.25, 0.5, 1e9])
  })

  it('leaves its input alone and refuses a damaged column', () => {
    const values = Float64Array.of(1.5, NaN, 2.5)
    const bytes = encodeColumn(values)
    expect(Array.from(values)).toEqual([1.5, NaN, 2.5])
    expect(() => decodeColumn(bytes, 2)).toThrow(/more than the 2/)
    expect(() => decodeColumn(bytes, 4)).toThrow(/holds 3/)
    expect(() => decodeColumn(Uint8Array.of(9, 1), 1)).toThrow(/kind 9/)
    expect(() => encodeColumn(values, 2, 5)).toThrow(RangeError)
  })

  it('a slowly moving signal costs about a byte a value, a constant one next to nothing', () => {
    const slow = Float64Array.from({ length: 8640 }, (_, i) => Math.round(500 * Math.sin(i / 300)) / 10)
    expect(encodeColumn(slow).length).toBeLessThan(8640 * 1.05)
    expect(encodeColumn(new Float64Array(8640).fill(55)).length).toBeLessThan(16)
  })
})

describe('a block', () => {
  it('keeps a grid as its step and odd time stamps as they are', () => {
    const regular = encodeBlock(1, day({ t: grid(50), pv: new Float64Array(50).fill(1) }))
    expect(regular).toMatchObject({ day: '2026-11-23', n: 50, intervalMs: 10_000, timestamps: null })
    const t = Float64Array.of(DAY, DAY + 10_001, DAY + 20_000, DAY + 86_399_999)
    const odd = encodeBlock(1, day({ t, op: Float64Array.of(1, 2, NaN, 4), mode: Uint8Array.of(0, 0, MODE_UNKNOWN, 1), modeNames: ['AUTO', 'MAN'] }))
    expect(odd.intervalMs).toBeNull()
    expect(decodeBlock(odd)).toEqual(day({ t, op: Float64Array.of(1, 2, NaN, 4), mode: Uint8Array.of(0, 0, MODE_UNKNOWN, 1), modeNames: ['AUTO', 'MAN'] }))
    expect(() => encodeBlock(1, day({ t: Float64Array.of(DAY, DAY + 86_400_000) }))).toThrow(/not of one day/)
  })

  it('random blocks come back equal', () => {
    const random = seededRandom(5).uniform
    for (let round = 0; round < 40; round++) {
      const n = 1 + Math.floor(random() * 300)
      let at = DAY
      const t = Float64Array.from({ length: n }, () => at += 1 + Math.floor(random() * 250_000 * (random() < 0.1 ? 1 : 0.01)))
      const some = () => random() < 0.2 ? null : Float64Array.from({ length: n }, () => Math.round(random() * 1e4) / 100)
      const samples = day({ t, pv: some(), sp: some(), op: some(), mode: Uint8Array.from({ length: n }, () => random() < 0.9 ? 0 : MODE_UNKNOWN), modeNames: ['AUTO'] })
      expect(decodeBlock(encodeBlock(3, samples))).toEqual(samples)
    }
  })
})

describe('appending', () => {
  it('gives what one block of all samples would decode to, on a grid, over a gap, and with signals that come and go', () => {
    const whole = day({ t: grid(9), pv: Float64Array.of(1, 2, 3, 4, 5, 6, 7, 8, 9), mode: Uint8Array.of(0, 0, 0, 1, 1, 1, 0, 0, 1), modeNames: ['AUTO', 'MAN'] })
    const joined = appendBlock(appendBlock(encodeBlock(1, whole, 0, 3), encodeBlock(1, whole, 3, 4))!, encodeBlock(1, whole, 4, 9))!
    expect(decodeBlock(joined)).toEqual(whole)
    expect(joined.intervalMs).toBe(10_000)
    const late = day({ t: grid(2, DAY + 200_000, 7_000), op: Float64Array.of(5, 6) })
    const both = appendBlock(encodeBlock(1, whole), encodeBlock(1, late))!
    expect(decodeBlock(both)).toEqual(mergeSamples(whole, late).samples)
    expect(appendBlock(encodeBlock(1, late), encodeBlock(1, whole))).toBeNull()
  })
})

describe('later samples over earlier ones', () => {
  const first = day({ t: grid(4), pv: Float64Array.of(1, 2, NaN, 4), mode: Uint8Array.of(0, 0, 0, 0), modeNames: ['AUTO'] })

  it('later wins value by value, a missing value wipes out nothing, and changes are counted', () => {
    const later = day({ t: Float64Array.of(DAY + 10_000, DAY + 20_000, DAY + 30_000, DAY + 35_000), pv: Float64Array.of(2.5, 3, NaN, 9), sp: Float64Array.of(5, 5, 5, NaN), mode: Uint8Array.of(0, 1, MODE_UNKNOWN, 1), modeNames: ['MAN', 'AUTO'] })
    const { samples, changed, added, fromMs, toMs } = mergeSamples(first, later)
    expect(Array.from(samples.t)).toEqual([DAY, DAY + 10_000, DAY + 20_000, DAY + 30_000, DAY + 35_000])
    expect(Array.from(samples.pv!)).toEqual([1, 2.5, 3, 4, 9])
    expect(Array.from(samples.sp!)).toEqual([NaN, 5, 5, 5, NaN])
    expect(samples.modeNames).toEqual(['AUTO', 'MAN'])
    expect(Array.from(samples.mode!)).toEqual([0, 1, 0, 0, 0])
    expect(changed).toBe(2) // PV 2 -> 2.5, AUTO -> MAN
    expect(added).toBe(2 + 3 + 1)
    expect([fromMs, toMs]).toEqual([DAY + 10_000, DAY + 35_000])
  })

  it('the same again changes nothing, whatever the order of the two', () => {
    const block = encodeBlock(1, first)
    expect(mergeBlock(block, encodeBlock(1, first))).toMatchObject({ block: null, changed: 0, added: 0 })
    const part = encodeBlock(1, day({ t: grid(2), pv: Float64Array.of(1, 2) }))
    expect(mergeBlock(block, part)).toMatchObject({ block: null, changed: 0, added: 0 })
    const grown = mergeBlock(part, block)
    expect(grown.changed).toBe(0)
    expect(decodeBlock(grown.block!)).toEqual(first)
  })

  it('splitting a day in any way gives the same block as the whole', () => {
    const random = seededRandom(9).uniform
    const n = 200
    const whole = day({ t: grid(n), pv: Float64Array.from({ length: n }, () => Math.round(random() * 1e3) / 10), op: Float64Array.from({ length: n }, () => random() < 0.1 ? NaN : Math.round(random() * 100)) })
    const pick = (keep: (i: number) => boolean) => {
      const index = Array.from({ length: n }, (_, i) => i).filter(keep)
      return encodeBlock(1, day({ t: Float64Array.from(index, i => whole.t[i]), pv: Float64Array.from(index, i => whole.pv![i]), op: Float64Array.from(index, i => whole.op![i]) }))
    }
    for (const keep of [(i: number) => i < 77, (i: number) => i % 3 === 0, (i: number) => i > 10 && i < 120])
      expect(mergeBlock(pick(keep), pick(i => !keep(i))).block).toEqual(encodeBlock(1, whole))
  })

  it('refuses blocks of different loops', () => expect(() => mergeBlock(encodeBlock(1, first), encodeBlock(2, first))).toThrow(/different/))
})
