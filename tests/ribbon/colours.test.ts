/**
 * The states are told apart by people with any colour vision, on screen and in grey print.
 * Outside sources: Machado, Oliveira, Fernandes 2009, A Physiologically-based Model for Simulation of Color Vision
 * Deficiency (severity 1.0 matrices, applied to linear RGB); CIEDE2000 by the library culori, checked here against
 * Sharma, Wu, Dalal 2005, The CIEDE2000 Color-Difference Formula, table 1; WCAG 2.2, 1.4.3 and 1.4.11.
 */
import { readFileSync } from 'node:fs'
// @ts-expect-error the library ships no types
import { converter, differenceCiede2000, wcagContrast } from 'culori'
import { describe, expect, it } from 'vitest'
import { LEDGER_STATES, LOST_STATES, type LedgerState } from '../../shared/assessment/types'
import { STATE_COLOURS, type Theme } from '../../shared/ribbon/colours'
import { wordsOf } from '../../shared/ribbon/states'

const linear = converter('lrgb') as (colour: string) => { r: number, g: number, b: number }
const difference = differenceCiede2000() as (a: unknown, b: unknown) => number
const contrast = wcagContrast as (a: string, b: string) => number

const dichromacies: Record<string, number[]> = {
  full: [1, 0, 0, 0, 1, 0, 0, 0, 1],
  protanopia: [0.152286, 1.052583, -0.204868, 0.114503, 0.786281, 0.099216, -0.003882, -0.048116, 1.051998],
  deuteranopia: [0.367322, 0.860646, -0.227968, 0.280085, 0.672501, 0.047413, -0.011820, 0.042940, 0.968881],
  tritanopia: [1.255528, -0.076749, -0.178779, -0.078411, 0.930809, 0.147602, 0.004733, 0.691367, 0.303900],
}
// relative luminance of ITU-R BT.709 primaries in all three channels
const grey = [0.2126, 0.7152, 0.0722, 0.2126, 0.7152, 0.0722, 0.2126, 0.7152, 0.0722]

function seen(colour: string, m: number[]) {
  const { r, g, b } = linear(colour)
  const row = (i: number) => Math.min(1, Math.max(0, m[i] * r + m[i + 1] * g + m[i + 2] * b))
  return { mode: 'lrgb', r: row(0), g: row(3), b: row(6) }
}

const filled = LEDGER_STATES.filter(s => s !== 'noData')
const isLost = (s: LedgerState) => (LOST_STATES as readonly string[]).includes(s)
const pairs = filled.flatMap((a, i) => filled.slice(i + 1).map(b => [a, b] as const))

function variables(theme: Theme): Record<string, string> {
  const css = readFileSync(new URL('../../assets/css/base.css', import.meta.url), 'utf8')
  const block = theme === 'light' ? css.slice(css.indexOf(':root {'), css.indexOf('}')) : /data-theme='dark'\] \{([^}]*)\}/.exec(css)![1]
  return Object.fromEntries([...block.matchAll(/--([\w-]+): ([^;]+);/g)].map(m => [m[1], m[2].trim()]))
}

describe('tools of this test', () => {
  it('CIEDE2000 agrees with the published pairs', () => {
    const lab = (l: number, a: number, b: number) => ({ mode: 'lab65', l, a, b })
    for (const [p, q, expected] of [
      [lab(50, 2.6772, -79.7751), lab(50, 0, -82.7485), 2.0425], [lab(50, 3.1571, -77.2803), lab(50, 0, -82.7485), 2.8615],
      [lab(50, 2.5, 0), lab(73, 25, -18), 27.1492], [lab(50, 2.5, 0), lab(61, -5, 29), 22.8977], [lab(50, 2.5, 0), lab(58, 24, 15), 19.4535],
    ] as const) expect(difference(p, q)).toBeCloseTo(expected, 3)
  })
  it('white stays white for every eye, and black to white is the 21:1 of WCAG', () => {
    for (const m of Object.values(dichromacies)) for (const v of ['r', 'g', 'b'] as const) expect(seen('#FFFFFF', m)[v]).toBeCloseTo(1, 4)
    expect(contrast('#000000', '#FFFFFF')).toBeCloseTo(21, 6)
  })
})

describe.each(['light', 'dark'] as const)('%s', (theme) => {
  const colours = STATE_COLOURS[theme]
  const css = variables(theme)

  it('style sheet and list say the same', () => {
    for (const s of LEDGER_STATES) expect(css[`state-${s}`].toUpperCase()).toBe(colours[s].fill ?? 'TRANSPARENT')
  })

  it.each(Object.keys(dichromacies))('cells of one hour, too small for a pattern, differ in colour: %s', (vision) => {
    for (const [a, b] of pairs) {
      const apart = difference(seen(colours[a].fill!, dichromacies[vision]), seen(colours[b].fill!, dichromacies[vision]))
      // 2.3 is the just noticeable difference of large patches; a thin cell needs several times that
      expect(apart, `${a} and ${b}`).toBeGreaterThan(isLost(a) || isLost(b) ? 12 : 7)
    }
  })

  it('grey print keeps them apart by shade and by pattern', () => {
    for (const [a, b] of pairs) {
      expect(difference(seen(colours[a].fill!, grey), seen(colours[b].fill!, grey)), `${a} and ${b}`).toBeGreaterThan(5)
      expect(wordsOf(a).pattern).not.toBe(wordsOf(b).pattern)
    }
  })

  it('the pattern is visible on its own fill (WCAG 1.4.11)', () => {
    for (const s of LOST_STATES) expect(contrast(colours[s].mark, colours[s].fill!), s).toBeGreaterThanOrEqual(3)
    expect(contrast(colours.down.mark, colours.down.fill!)).toBeGreaterThanOrEqual(3)
    expect(contrast(colours.noData.mark, css.panel)).toBeGreaterThanOrEqual(3)
  })

  it('lost hours stand out from the steady ones around them', () => {
    for (const s of LOST_STATES) expect(difference(seen(colours[s].fill!, dichromacies.full), seen(colours.steady.fill!, dichromacies.full)), s).toBeGreaterThan(20)
  })

  it('text pairs meet WCAG 1.4.3 level AA', () => {
    for (const text of ['ink', 'quiet', 'act', 'warn']) for (const ground of ['paper', 'panel', 'tint'])
      expect(contrast(css[text], css[ground]), `${text} on ${ground}`).toBeGreaterThanOrEqual(4.5)
    expect(contrast(css['on-act'], css.act)).toBeGreaterThanOrEqual(4.5)
  })
})
