import { describe, expect, it } from 'vitest'
import { bandOrder } from '../../shared/ribbon/bandOrder'
import { commonUpsets } from '../../shared/ribbon/commonUpsets'
import { lostBetween } from '../../shared/ribbon/lostBetween'

const strip = (from: number, to: number, letter = 'h', hours = 168) => 's'.repeat(from) + letter.repeat(to - from) + 's'.repeat(hours - to)
const quiet = 's'.repeat(168)

describe('bandOrder', () => {
  it('puts loops that lose the same hours side by side, the common upset first, quiet loops last', () => {
    const ribbons = [quiet, strip(10, 20), strip(100, 104), quiet, strip(100, 105, 'o'), strip(11, 19), strip(100, 106), strip(101, 104)]
    const order = bandOrder(ribbons)
    expect([...order].sort((a, b) => a - b)).toEqual([0, 1, 2, 3, 4, 5, 6, 7])
    expect(new Set(order.slice(0, 4))).toEqual(new Set([2, 4, 6, 7]))
    expect(new Set(order.slice(4, 6))).toEqual(new Set([1, 5]))
    expect(order.slice(6)).toEqual([0, 3])
  })
  it('does not depend on which hours they are', () => {
    const at = (shift: number) => bandOrder([strip(10 + shift, 20 + shift), quiet, strip(60 + shift, 64 + shift), strip(12 + shift, 18 + shift)])
    expect(at(31)).toEqual(at(0))
    expect(at(90)).toEqual(at(0))
  })
  it('copes with none, one, and weeks of 167 and 169 hours', () => {
    expect(bandOrder([])).toEqual([])
    expect(bandOrder([quiet])).toEqual([0])
    expect(bandOrder(['h'.repeat(167), 'h'.repeat(169)])).toHaveLength(2)
  })
  it('leaves its input alone', () => {
    const ribbons = Object.freeze([quiet, strip(1, 2)])
    expect(() => bandOrder(ribbons)).not.toThrow()
  })
})

describe('commonUpsets', () => {
  it('finds the hours in which half of the loops are lost', () => {
    const ribbons = [strip(60, 64), strip(60, 64, 'o'), strip(61, 64), strip(61, 63), strip(20, 90, 'm'), quiet, quiet, quiet]
    // hours 61 and 62: five of eight; hours 60 and 63: three and four
    expect(commonUpsets(ribbons)).toEqual([{ from: 61, to: 64, loops: 5, lostHours: 14 }])
  })
  it('needs four loops, however small the area, and counts no outage', () => {
    expect(commonUpsets([strip(60, 64), strip(60, 64), strip(60, 64)])).toEqual([])
    expect(commonUpsets(Array(8).fill(strip(60, 64, 'd')))).toEqual([])
    expect(commonUpsets([])).toEqual([])
  })
  it('reaches the edges of the week and ranks by lost hours', () => {
    const ribbons = Array(4).fill(`hh${'s'.repeat(160)}hhhhhh`)
    expect(commonUpsets(ribbons).map(u => [u.from, u.to, u.lostHours])).toEqual([[162, 168, 24], [0, 2, 8]])
  })
})

describe('lostBetween', () => {
  it('counts lost hours inside the window only, edges half open', () => {
    expect(lostBetween([strip(10, 14), strip(12, 20, 'd'), quiet], 12, 16)).toEqual({ hours: 2, loops: 1 })
    expect(lostBetween([strip(10, 14)], 14, 20)).toEqual({ hours: 0, loops: 0 })
    expect(lostBetween([strip(0, 168)], -5, 999)).toEqual({ hours: 168, loops: 1 })
  })
})
