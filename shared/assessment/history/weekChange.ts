import { LOST_STATES, RIBBON_LETTERS } from '../types'
import { changePoint } from './changePoint'

export interface WeekRibbon { week: string, ribbon: string }
export interface WeekChange { mark: 'worse' | 'better', since: string, pValue: number, hoursPerWeekBefore: number, hoursPerWeekAfter: number }

const lost = new Set<string>(LOST_STATES.map(state => RIBBON_LETTERS[state]))
/** One loop in a hundred may be marked by chance and week; with hundreds of loops more would be noise. */
const LEVEL = 0.01
/** Below this many lost hours a week a change is not worth a mark. */
const LEAST_HOURS_PER_WEEK = 6
const LONGEST_WEEKS = 26

/**
 * Whether a loop got worse or better than its own past beyond chance, and since which week. Looks at lost hours per
 * day (days with data for at least half of their hours), finds the change point, and asks that it falls at or before
 * the last week and that the difference is worth telling. Days of one upset hang together, so a change also has to hold
 * for three days or more.
 *
 * @param weeks oldest first, the last one is the week judged; at least two
 * @returns null when there is no change beyond chance, or too little to compare
 * Source: Pettitt (1979) for the change point; level and least difference are ours.
 */
export function weekChange(weeks: readonly WeekRibbon[]): WeekChange | null {
  const days: { week: string, hours: number }[] = []
  for (const { week, ribbon } of weeks.slice(-LONGEST_WEEKS)) {
    for (let day = 0; day < 7; day++) {
      const letters = ribbon.slice(Math.round(day * ribbon.length / 7), Math.round((day + 1) * ribbon.length / 7))
      const known = [...letters].filter(letter => letter !== '.' && letter !== 'd').length
      if (known < letters.length / 2 || known === 0) continue
      days.push({ week, hours: [...letters].filter(letter => lost.has(letter)).length / known * 24 })
    }
  }
  if (days.length < 8) return null
  const found = changePoint(Float64Array.from(days, d => d.hours))
  if (found.pValue >= LEVEL || found.at < 3 || days.length - found.at < 3) return null
  const mean = (part: { hours: number }[]) => part.reduce((sum, d) => sum + d.hours, 0) / part.length * 7
  const before = mean(days.slice(0, found.at))
  const after = mean(days.slice(found.at))
  if (Math.abs(after - before) < LEAST_HOURS_PER_WEEK) return null
  return { mark: after > before ? 'worse' : 'better', since: days[found.at].week, pValue: found.pValue, hoursPerWeekBefore: before, hoursPerWeekAfter: after }
}
