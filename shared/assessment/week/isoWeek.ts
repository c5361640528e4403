/**
 * ISO 8601 weeks in a time zone: week numbers by the Thursday rule, weeks that begin on Monday 00:00 local time.
 * Only `Intl` knows the clocks; a week in which they change has 167 or 169 hours (with a half-hour shift the last
 * cell is half an hour long).
 * Source: ISO 8601-1:2019, 5.2.3 (week dates).
 */
import type { WeekFrame } from '../types'

const HOUR_MS = 3_600_000
const DAY_MS = 24 * HOUR_MS

const formatters = new Map<string, Intl.DateTimeFormat>()

function formatterOf(zone: string): Intl.DateTimeFormat {
  let formatter = formatters.get(zone)
  if (!formatter) {
    try {
      formatter = new Intl.DateTimeFormat('en-US', {
        timeZone: zone, hourCycle: 'h23', era: 'short',
        year: 'numeric', month: 'numeric', day: 'numeric', hour: 'numeric', minute: 'numeric', second: 'numeric',
      })
    }
    catch {
      throw new RangeError(`isoWeek: "${zone}" is not a time zone`)
    }
    formatters.set(zone, formatter)
  }
  return formatter
}

/** Local wall-clock time of an instant, as if it were UTC (epoch ms). */
function localMs(ms: number, zone: string): number {
  const part: Record<string, number> = {}
  for (const p of formatterOf(zone).formatToParts(ms)) part[p.type] = Number(p.value)
  const wholeSecond = Date.UTC(part.year, part.month - 1, part.day, part.hour, part.minute, part.second)
  return wholeSecond + (((ms % 1000) + 1000) % 1000)
}

/** First instant of the local day whose date is `dayUtc` (00:00 of that date written as UTC). */
function startOfLocalDay(dayUtc: number, zone: string): number {
  const offsetBefore = localMs(dayUtc - DAY_MS, zone) - (dayUtc - DAY_MS)
  const offsetAfter = localMs(dayUtc + DAY_MS, zone) - (dayUtc + DAY_MS)
  const candidates = [dayUtc - offsetBefore, dayUtc - offsetAfter].sort((a, b) => a - b)
  for (const c of candidates) if (localMs(c, zone) === dayUtc) return c
  // midnight does not exist on this date: the clocks jump over it, and the jump is the day's first instant
  return dayUtc - offsetBefore
}

/** Monday (written as UTC midnight) of an ISO week of a year; week 1 holds 4 January. */
function mondayOf(year: number, week: number): number {
  const fourth = Date.UTC(year, 0, 4)
  const weekday = (new Date(fourth).getUTCDay() + 6) % 7
  return fourth - weekday * DAY_MS + (week - 1) * 7 * DAY_MS
}

const weeksInYear = (year: number): number => Math.round((mondayOf(year + 1, 1) - mondayOf(year, 1)) / (7 * DAY_MS))

function parse(id: string): { year: number, week: number } {
  const match = /^(\d{4})-W(\d{2})$/.exec(id)
  const year = Number(match?.[1])
  const week = Number(match?.[2])
  if (!match || week < 1 || week > weeksInYear(year))
    throw new RangeError(`isoWeek: "${id}" is not an ISO week such as 2026-W48`)
  return { year, week }
}

const idOf = (year: number, week: number): string => `${String(year).padStart(4, '0')}-W${String(week).padStart(2, '0')}`

function idOfMonday(monday: number): string {
  const year = new Date(monday + 3 * DAY_MS).getUTCFullYear()
  return idOf(year, Math.round((monday - mondayOf(year, 1)) / (7 * DAY_MS)) + 1)
}

/** The ISO week, e.g. `2026-W48`, that holds an instant (epoch ms) in a zone. Throws RangeError on an unknown zone. */
export function weekOf(ms: number, zone: string): string {
  if (!Number.isFinite(ms)) throw new RangeError(`isoWeek: ${ms} is not a time`)
  const local = localMs(ms, zone)
  const day = Math.floor(local / DAY_MS) * DAY_MS
  return idOfMonday(day - ((new Date(day).getUTCDay() + 6) % 7) * DAY_MS)
}

/** Hour edges of a week in a zone (epoch ms). Throws RangeError on an unknown week or zone. */
export function weekFrame(id: string, zone: string): WeekFrame {
  const { year, week } = parse(id)
  const monday = mondayOf(year, week)
  const from = startOfLocalDay(monday, zone)
  const to = startOfLocalDay(monday + 7 * DAY_MS, zone)
  const hours = Math.ceil((to - from) / HOUR_MS)
  const hourEdges = new Float64Array(hours + 1)
  for (let h = 0; h < hours; h++) hourEdges[h] = from + h * HOUR_MS
  hourEdges[hours] = to
  return { id, hourEdges }
}

/** The week before. */
export function previousWeek(id: string): string {
  const { year, week } = parse(id)
  return idOfMonday(mondayOf(year, week) - 7 * DAY_MS)
}

/** The week after. */
export function nextWeek(id: string): string {
  const { year, week } = parse(id)
  return idOfMonday(mondayOf(year, week) + 7 * DAY_MS)
}

/** All weeks that [fromMs, toMs) touches, in order; none when it is empty. */
export function weeksBetween(fromMs: number, toMs: number, zone: string): string[] {
  if (!(toMs > fromMs)) return []
  const last = weekOf(toMs - 1, zone)
  const weeks = [weekOf(fromMs, zone)]
  while (weeks[weeks.length - 1] !== last) weeks.push(nextWeek(weeks[weeks.length - 1]))
  return weeks
}
