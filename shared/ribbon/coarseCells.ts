import { LEDGER_STATES, type LedgerState } from '../assessment/types'
import { hoursOf } from './hoursOf'
import { isLost } from './states'

export interface CoarseCell { state: LedgerState, from: number, to: number, hours: number }

/**
 * The ribbon in fewer cells, for mail and narrow screens. A cell shows the lost state with most hours once that
 * holds a third of the cell, because a short trouble must not vanish behind the steady hours around it; otherwise
 * the state with most hours. Ties go to the state that the ledger names first.
 * @param ribbon letters, one per hour
 * @param cells how many cells; in a week with a clock change the last one is an hour shorter or longer
 */
export function coarseCells(ribbon: string, cells = 28): CoarseCell[] {
  if (!Number.isInteger(cells) || cells < 1 || cells > Math.max(1, ribbon.length)) throw new RangeError(`coarseCells: ${cells} cells from ${ribbon.length} hours`)
  const length = Math.round(ribbon.length / cells)
  return Array.from({ length: cells }, (_, i) => {
    const from = i * length
    const to = i === cells - 1 ? ribbon.length : from + length
    const hours = hoursOf(ribbon.slice(from, to))
    const most = (states: LedgerState[]): LedgerState => states.reduce((a, b) => (hours[b] > hours[a] ? b : a))
    const worst = most(LEDGER_STATES.filter(isLost))
    const state = hours[worst] * 3 >= to - from ? worst : most([...LEDGER_STATES])
    return { state, from, to, hours: hours[state] }
  })
}
