/** Dates and times in the site's zone, day first with the month as a word, so that nobody reads day for month. */
import { weekFrame } from '../assessment/week/isoWeek'

type Instant = number | string | Date
const ms = (at: Instant): number => (at instanceof Date ? at.getTime() : typeof at === 'number' ? at : Date.parse(at))

const formatters = new Map<string, Intl.DateTimeFormat>()
function parts(at: Instant, zone: string): Record<string, string> {
  let formatter = formatters.get(zone)
  if (!formatter) {
    formatter = new Intl.DateTimeFormat('en-GB', {
      timeZone: zone, hourCycle: 'h23', weekday: 'short', day: 'numeric', month: 'short', year: 'numeric', hour: '2-digit', minute: '2-digit', second: '2-digit',
    })
    formatters.set(zone, formatter)
  }
  const found = Object.fromEntries(formatter.formatToParts(ms(at)).map(part => [part.type, part.value]))
  // the locale writes "Sept"; three letters keep columns even
  return { ...found, month: found.month.slice(0, 3) }
}

/** `16 Nov 2026` */
export function formatDate(at: Instant, zone: string): string {
  const p = parts(at, zone)
  return `${p.day} ${p.month} ${p.year}`
}

/** `14:05`, or with seconds `14:05:30` */
export function formatTime(at: Instant, zone: string, withSeconds = false): string {
  const p = parts(at, zone)
  return `${p.hour}:${p.minute}${withSeconds ? `:${p.second}` : ''}`
}

/** `Mon 16 Nov, 14:05` */
export function formatMoment(at: Instant, zone: string): string {
  const p = parts(at, zone)
  return `${p.weekday} ${p.day} ${p.month}, ${p.hour}:${p.minute}`
}

/** `16 Nov 2026, 14:05` */
export function formatDateTime(at: Instant, zone: string): string {
  return `${formatDate(at, zone)}, ${formatTime(at, zone)}`
}

/** Calendar dates of a week: `16 to 22 Nov 2026`, `28 Dec 2026 to 3 Jan 2027`. */
export function formatWeekDates(week: string): string {
  const { hourEdges } = weekFrame(week, 'UTC')
  const first = parts(hourEdges[0], 'UTC')
  const last = parts(hourEdges[hourEdges.length - 1] - 1, 'UTC')
  const end = `${last.day} ${last.month} ${last.year}`
  if (first.year !== last.year) return `${first.day} ${first.month} ${first.year} to ${end}`
  if (first.month !== last.month) return `${first.day} ${first.month} to ${end}`
  return `${first.day} to ${end}`
}

/** `Week 47, 16 to 22 Nov 2026` */
export function formatWeek(week: string): string {
  return `Week ${Number(week.slice(6))}, ${formatWeekDates(week)}`
}

/** One cell of a ribbon: `Tue 17 Nov, 14:00 to 15:00`. */
export function formatHourOfWeek(week: string, hour: number, zone: string): string {
  const { hourEdges } = weekFrame(week, zone)
  if (hour < 0 || hour >= hourEdges.length - 1) return ''
  return `${formatMoment(hourEdges[hour], zone)} to ${formatTime(hourEdges[hour + 1], zone)}`
}
