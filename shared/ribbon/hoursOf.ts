import type { LedgerState } from '../assessment/types'
import { runsOf } from './runsOf'
import { isLost, noHours } from './states'

/** Hours by state; they add up to the length of the ribbon. */
export function hoursOf(ribbon: string): Record<LedgerState, number> {
  const hours = noHours()
  for (const run of runsOf(ribbon)) hours[run.state] += run.to - run.from
  return hours
}

/** Lost hours of an account of hours by state. */
export function lostOf(hours: Record<LedgerState, number>): number {
  let sum = 0
  for (const state in hours) if (isLost(state as LedgerState)) sum += hours[state as LedgerState]
  return sum
}
