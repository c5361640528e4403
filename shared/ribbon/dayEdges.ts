import { weekFrame } from '../assessment/week/isoWeek'

/**
 * Index of the hour with which each local day of a week begins, Monday first; seven numbers from 0.
 * Where the clocks change, the days after lie one hour off the multiples of 24.
 */
export function dayEdges(week: string, zone: string): number[] {
  const { hourEdges } = weekFrame(week, zone)
  const day = new Intl.DateTimeFormat('en-GB', { timeZone: zone, day: 'numeric' })
  const edges: number[] = []
  let last = ''
  for (let h = 0; h < hourEdges.length - 1; h++) {
    const date = day.format(hourEdges[h])
    if (date !== last) edges.push(h)
    last = date
  }
  return edges
}

export const DAY_NAMES = ['Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday', 'Sunday'] as const
