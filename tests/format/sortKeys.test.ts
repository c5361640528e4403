import { describe, expect, it } from 'vitest'
import { parseSort, pressSort, writeSort } from '../../shared/format/sortKeys'

const press = (from: string, key: string, add = false, descendingFirst = true) => writeSort(pressSort(parseSort(from), key, { add, descendingFirst }))

describe('sort keys', () => {
  it('are written and read back', () => {
    for (const text of ['', 'tag', '-weightedLostHours,tag']) expect(writeSort(parseSort(text))).toBe(text)
    expect(parseSort(' -a , ,b')).toEqual([{ key: 'a', descending: true }, { key: 'b', descending: false }])
  })
  it('a press begins, turns, ends', () => {
    expect(press('', 'lostHours')).toBe('-lostHours')
    expect(press('-lostHours', 'lostHours')).toBe('lostHours')
    expect(press('lostHours', 'lostHours')).toBe('')
    expect(press('', 'tag', false, false)).toBe('tag')
    expect(press('tag', 'lostHours')).toBe('-lostHours')
    expect(press('tag,-lostHours', 'lostHours')).toBe('-lostHours')
  })
  it('with Shift the other keys stay', () => {
    expect(press('-lostHours', 'tag', true, false)).toBe('-lostHours,tag')
    expect(press('-lostHours,tag', 'lostHours', true)).toBe('lostHours,tag')
    expect(press('lostHours,tag', 'lostHours', true)).toBe('tag')
  })
})
