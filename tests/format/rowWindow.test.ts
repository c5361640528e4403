import { describe, expect, it } from 'vitest'
import { rowWindow } from '../../shared/format/rowWindow'

const at = (scrolled: number, count = 2000) => rowWindow({ count, rowHeight: 44, scrolled, visible: 660, spare: 6 })

describe('rowWindow', () => {
  it('draws what is visible with some rows to spare, however long the list', () => {
    for (let y = 0; y <= 2000 * 44 - 660; y += 371) {
      const { from, to, above, below } = at(y)
      expect(from * 44).toBeLessThanOrEqual(y)
      expect(to * 44).toBeGreaterThanOrEqual(Math.min(2000 * 44, y + 660))
      expect(to - from).toBeLessThan(31)
      expect(above + (to - from) * 44 + below).toBe(2000 * 44)
    }
  })
  it('copes with none, few, and scrolling past the end', () => {
    expect(at(0, 0)).toEqual({ from: 0, to: 0, above: 0, below: 0 })
    expect(at(0, 3)).toEqual({ from: 0, to: 3, above: 0, below: 0 })
    expect(at(1e6, 10)).toMatchObject({ to: 10, below: 0 })
  })
})
