/**
 * The ribbon: one letter per hour of the week ledger, and back.
 */
import { LEDGER_STATES, RIBBON_LETTERS, type LedgerState } from '../types'

/** @param states index into LEDGER_STATES per hour */
export function ribbonOf(states: Uint8Array): string {
  let ribbon = ''
  for (const s of states) {
    if (s >= LEDGER_STATES.length) throw new RangeError(`ribbonOf: ${s} is not a state`)
    ribbon += RIBBON_LETTERS[LEDGER_STATES[s]]
  }
  return ribbon
}

/** State of a letter. Throws RangeError on a letter that is none. */
export function stateOfLetter(letter: string): LedgerState {
  for (const state of LEDGER_STATES) if (RIBBON_LETTERS[state] === letter) return state
  throw new RangeError(`stateOfLetter: "${letter}" is not a letter of the ribbon`)
}

/** Whole hours per state, from the letters. */
export function hoursOfRibbon(ribbon: string): Record<LedgerState, number> {
  const hours = Object.fromEntries(LEDGER_STATES.map(s => [s, 0])) as Record<LedgerState, number>
  for (const letter of ribbon) hours[stateOfLetter(letter)]++
  return hours
}
