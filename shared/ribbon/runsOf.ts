import type { LedgerState } from '../assessment/types'
import { stateOfLetter } from './states'

/** Hours [from, to) of one state at a stretch. */
export interface Run { state: LedgerState, from: number, to: number }

/**
 * The letters of a ribbon as runs of equal state, in order and without gaps. Every drawing of a ribbon starts here.
 * @param ribbon letters, one per hour: 168, or 167 / 169 in a week with a clock change; any length is drawn
 * @throws RangeError on a letter that is no state, with its position
 */
export function runsOf(ribbon: string): Run[] {
  const runs: Run[] = []
  for (let from = 0, to = 0; from < ribbon.length; from = to) {
    const state = stateOfLetter(ribbon[from])
    if (!state) throw new RangeError(`ribbon: "${ribbon[from]}" at hour ${from} is no state`)
    while (to < ribbon.length && ribbon[to] === ribbon[from]) to++
    runs.push({ state, from, to })
  }
  return runs
}
