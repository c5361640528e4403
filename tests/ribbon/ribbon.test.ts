import { describe, expect, it } from 'vitest'
import { LEDGER_STATES, RIBBON_LETTERS } from '../../shared/assessment/types'
import { coarseCells } from '../../shared/ribbon/coarseCells'
import { hoursOf, lostOf } from '../../shared/ribbon/hoursOf'
import { markPath } from '../../shared/ribbon/markPath'
import { ribbonSummary } from '../../shared/ribbon/ribbonSummary'
import { runsOf } from '../../shared/ribbon/runsOf'
import { STATES } from '../../shared/ribbon/states'

const week = `${'s'.repeat(14)}${'h'.repeat(10)}${'s'.repeat(24)}${'o'.repeat(2)}${'d'.repeat(10)}..${'s'.repeat(106)}`

describe('runsOf', () => {
  it('covers the week without gaps and joins only equal hours', () => {
    const runs = runsOf(week)
    expect(runs.map(r => `${r.state}${r.from}-${r.to}`)).toEqual(['steady0-14', 'hunting14-24', 'steady24-48', 'offTarget48-50', 'down50-60', 'noData60-62', 'steady62-168'])
  })
  it.each([167, 168, 169])('draws a week of %d hours', (length) => {
    const runs = runsOf('hs'.repeat(100).slice(0, length))
    expect(runs).toHaveLength(length)
    expect(runs[runs.length - 1].to).toBe(length)
  })
  it('gives the same letters back', () => {
    expect(runsOf(week).map(r => RIBBON_LETTERS[r.state].repeat(r.to - r.from)).join('')).toBe(week)
  })
  it('has no runs of nothing and refuses what is no state', () => {
    expect(runsOf('')).toEqual([])
    expect(() => runsOf('ssq')).toThrow('"q" at hour 2')
  })
})

describe('hoursOf', () => {
  it('counts each hour once', () => {
    const hours = hoursOf(week)
    expect(Object.values(hours).reduce((a, b) => a + b)).toBe(168)
    expect(hours).toMatchObject({ hunting: 10, offTarget: 2, down: 10, noData: 2, steady: 144, manual: 0 })
    // lost hours by the contract: manual + saturated + hunting + offTarget + sensor
    expect(lostOf(hours)).toBe(12)
    expect(lostOf(hoursOf('muhoxsd.'))).toBe(5)
  })
})

describe('coarseCells', () => {
  it('makes 28 cells of six hours', () => {
    const cells = coarseCells(week)
    expect(cells).toHaveLength(28)
    expect(cells.map(c => RIBBON_LETTERS[c.state]).join('')).toBe(`ss${'hh'}ssssod${'s'.repeat(18)}`)
  })
  it('shows a trouble that holds a third of the cell, not one of a single hour', () => {
    expect(coarseCells('ssssmm', 1)[0]).toMatchObject({ state: 'manual', hours: 2 })
    expect(coarseCells('sssssm', 1)[0].state).toBe('steady')
  })
  it('gives the odd hour of a clock change to the last cell', () => {
    for (const n of [167, 169]) {
      const cells = coarseCells('s'.repeat(n))
      expect(cells).toHaveLength(28)
      expect(cells[27].to).toBe(n)
      expect(cells.every((c, i) => i === 0 || c.from === cells[i - 1].to)).toBe(true)
    }
  })
  it('refuses more cells than hours', () => expect(() => coarseCells('sss', 4)).toThrow(RangeError))
})

describe('words and marks', () => {
  it('every state has its own letter, label and pattern', () => {
    expect(new Set(STATES.map(s => s.state))).toEqual(new Set(LEDGER_STATES))
    for (const key of ['letter', 'label', 'pattern'] as const) expect(new Set(STATES.map(s => s[key])).size).toBe(8)
  })
  it('marks stay inside their tile height, at every height used', () => {
    for (const s of STATES) for (const height of [13, 20, 40]) {
      const mark = markPath(s.pattern, height)
      if (mark) expect(mark.width).toBeGreaterThan(3)
      expect(markPath(s.pattern, 5)).toBeNull()
    }
  })
  it('says the week in words', () => {
    expect(ribbonSummary(week)).toBe('168 hours, 12 lost: 10 hunting, 2 off target; 144 steady, 10 area down, 2 no data.')
    expect(ribbonSummary('s'.repeat(168))).toBe('168 hours, none lost; 168 steady.')
  })
})
