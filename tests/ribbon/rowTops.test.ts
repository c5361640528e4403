import { describe, expect, it } from 'vitest'
import { rowAt, rowTops } from '../../shared/ribbon/rowTops'

describe('rowTops and rowAt', () => {
  it('stacks rows with gaps between them only', () => {
    expect(rowTops({ count: 3, rowHeight: 20, gap: 2 })).toEqual([0, 22, 44, 64])
    expect(rowTops({ count: 1, rowHeight: 20, gap: 2 })).toEqual([0, 20])
    expect(rowTops({ count: 0, rowHeight: 20, gap: 2 })).toEqual([0])
  })
  it('makes quiet rows thin', () => {
    expect(rowTops({ count: 5, rowHeight: 4, gap: 0, quietFrom: 2, quietHeight: 1 })).toEqual([0, 4, 8, 9, 10, 11])
    expect(rowTops({ count: 2, rowHeight: 4, gap: 0, quietFrom: 0, quietHeight: 1 })).toEqual([0, 1, 2])
  })
  it('finds each row by its own heights, and the nearest one outside', () => {
    const tops = rowTops({ count: 40, rowHeight: 5, gap: 0, quietFrom: 7, quietHeight: 1 })
    for (let row = 0; row < 40; row++) for (const y of [tops[row], tops[row + 1] - 0.5]) expect(rowAt(tops, y)).toBe(row)
    expect(rowAt(tops, -3)).toBe(0)
    expect(rowAt(tops, 999)).toBe(39)
    expect(rowAt([0], 5)).toBe(0)
  })
})
