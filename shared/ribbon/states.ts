/** What people see of the ledger's states: words, letters, patterns. Screens, tables and mail all read this list. */
import { LEDGER_STATES, LOST_STATES, RIBBON_LETTERS, type LedgerState } from '../assessment/types'

export type Pattern = 'plain' | 'solid' | 'wave' | 'line' | 'slant' | 'dots' | 'hatch' | 'edge'

export interface StateWords {
  state: LedgerState
  letter: string
  /** as in "12 h hunting" */
  label: string
  /** a sentence: what an hour in this state is */
  meaning: string
  pattern: Pattern
  lost: boolean
}

const words: Record<LedgerState, { label: string, pattern: Pattern, meaning: string }> = {
  hunting: { label: 'hunting', pattern: 'wave', meaning: 'A regular oscillation of meaningful size was there.' },
  offTarget: { label: 'off target', pattern: 'slant', meaning: 'The mean absolute error over the hour was above the tolerance band.' },
  manual: { label: 'in manual', pattern: 'line', meaning: 'More than half of the hour outside the normal modes of the loop.' },
  saturated: { label: 'at a limit', pattern: 'solid', meaning: 'The output stood at a limit for more than half of the hour.' },
  sensor: { label: 'sensor doubtful', pattern: 'dots', meaning: 'The measurement was frozen, out of range or bad for more than half of the hour.' },
  steady: { label: 'steady', pattern: 'plain', meaning: 'None of the other states.' },
  down: { label: 'area down', pattern: 'hatch', meaning: 'Inside a declared outage of the area.' },
  noData: { label: 'no data', pattern: 'edge', meaning: 'Less than half of the hour has usable samples.' },
}

const lost = new Set<LedgerState>(LOST_STATES)

/** All states in the order of a legend: what costs hours first. */
export const STATES: readonly StateWords[] = (Object.keys(words) as LedgerState[])
  .map(state => ({ state, letter: RIBBON_LETTERS[state], lost: lost.has(state), ...words[state] }))

const byState = Object.fromEntries(STATES.map(s => [s.state, s])) as Record<LedgerState, StateWords>
const byLetter = new Map(STATES.map(s => [s.letter, s]))

export const wordsOf = (state: LedgerState): StateWords => byState[state]
export const isLost = (state: LedgerState): boolean => lost.has(state)
export const stateOfLetter = (letter: string): LedgerState | undefined => byLetter.get(letter)?.state

/** Zero hours in every state. */
export const noHours = (): Record<LedgerState, number> => Object.fromEntries(LEDGER_STATES.map(s => [s, 0])) as Record<LedgerState, number>
