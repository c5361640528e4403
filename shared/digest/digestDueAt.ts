import { weekFrame } from '../assessment/week/isoWeek'

const HOUR_MS = 3_600_000

function localHour(ms: number, zone: string): number {
  return Number(new Intl.DateTimeFormat('en-GB', { timeZone: zone, hour: '2-digit', hourCycle: 'h23' }).format(ms))
}

/**
 * When the digest of a week is due: in the week after it, on the given weekday at the given hour of the site's zone.
 * A local hour that the clocks skip or repeat on that day is never used: the next whole hour that exists exactly once is.
 *
 * @param weekAfter ISO week in which the digest goes out, e.g. `2026-W49` for the digest of W48
 * @param weekday 1 Monday .. 7 Sunday
 * @param hour 0..23, local
 * @returns epoch ms
 * @throws RangeError on a weekday or hour out of range, an unknown week or zone
 */
export function digestDueAt(weekAfter: string, zone: string, weekday: number, hour: number): number {
  if (!Number.isInteger(weekday) || weekday < 1 || weekday > 7) throw new RangeError(`digestDueAt: weekday must be 1 to 7, not ${weekday}.`)
  if (!Number.isInteger(hour) || hour < 0 || hour > 23) throw new RangeError(`digestDueAt: hour must be 0 to 23, not ${hour}.`)
  const { hourEdges } = weekFrame(weekAfter, zone)
  const weekdayOf = (ms: number) => (new Date(new Intl.DateTimeFormat('sv-SE', { timeZone: zone, dateStyle: 'short' }).format(ms) + 'T00:00:00Z').getUTCDay() + 6) % 7 + 1
  const hours = Array.from(hourEdges).slice(0, -1).filter(ms => weekdayOf(ms) === weekday)
  const names = hours.map(ms => localHour(ms, zone))
  for (let wanted = hour; wanted < 24; wanted++) {
    const first = names.indexOf(wanted)
    if (first >= 0 && names.lastIndexOf(wanted) === first) return hours[first]!
  }
  // Only a change in the last hours of the day comes here; the last hour before it is still that day.
  return hours[Math.max(0, hours.length - 2)] ?? hourEdges[0]! + HOUR_MS * hour
}
