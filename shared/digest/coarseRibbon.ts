import { LEDGER_STATES, LOST_STATES, RIBBON_LETTERS, type LedgerState } from '../assessment/types'

const stateOf = new Map(Object.entries(RIBBON_LETTERS).map(([state, letter]) => [letter, state as LedgerState]))
const isLost = (state: LedgerState) => (LOST_STATES as readonly string[]).includes(state)

/**
 * A week's ribbon in 28 cells of a quarter of a day, for plain table cells. A cell shows the lost state with the most
 * hours when at least two of its hours are lost (a lost third of a shift is worth a look), else the most frequent
 * state. Weeks with a clock change have one cell an hour shorter or longer.
 *
 * @param ribbon 167 to 169 letters, hour by hour
 * @returns 28 letters, or fewer for a shorter ribbon
 */
export function coarseRibbon(ribbon: string): string {
  if (ribbon.length === 0) return ''
  const cells = Math.min(28, ribbon.length)
  let coarse = ''
  for (let cell = 0; cell < cells; cell++) {
    const from = Math.round(cell * ribbon.length / cells)
    const to = Math.round((cell + 1) * ribbon.length / cells)
    const hours = new Map<LedgerState, number>()
    let lost = 0
    for (const letter of ribbon.slice(from, to)) {
      const state = stateOf.get(letter)
      if (!state) throw new RangeError(`coarseRibbon: "${letter}" is not a letter of the ribbon.`)
      hours.set(state, (hours.get(state) ?? 0) + 1)
      if (isLost(state)) lost++
    }
    const candidates = [...hours].filter(([state]) => lost < 2 || isLost(state))
    candidates.sort((a, b) => b[1] - a[1] || LEDGER_STATES.indexOf(a[0]) - LEDGER_STATES.indexOf(b[0]))
    coarse += RIBBON_LETTERS[candidates[0]![0]]
  }
  return coarse
}
