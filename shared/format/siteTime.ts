/** Milliseconds by which a zone is ahead of UTC at an instant. */
function offsetAt(instant: number, zone: string): number {
  const p = Object.fromEntries(new Intl.DateTimeFormat('en-GB', { timeZone: zone, hourCycle: 'h23', year: 'numeric', month: '2-digit', day: '2-digit', hour: '2-digit', minute: '2-digit', second: '2-digit' })
    .formatToParts(instant).map(part => [part.type, Number(part.value)]))
  return Date.UTC(p.year!, p.month! - 1, p.day, p.hour, p.minute, p.second) - Math.floor(instant / 1000) * 1000
}

/**
 * The instant (ISO 8601, UTC) of a local time `2026-11-16T14:05` in the site's zone; an empty or unreadable one is given
 * back as it is, for the server to refuse. In the doubled hour it is the earlier one; a time that the clock skips is
 * taken with the offset before the change.
 */
export function siteTimeToInstant(local: string, zone: string): string {
  const wall = Date.parse(`${local}Z`)
  if (Number.isNaN(wall)) return local
  // The offset of the day before is the one that holds until a change, the offset of the day after holds from it on.
  const before = wall - offsetAt(wall - 86_400_000, zone)
  const after = wall - offsetAt(wall + 86_400_000, zone)
  const instant = [before, after].filter(t => t + offsetAt(t, zone) === wall).sort((a, b) => a - b)[0] ?? before
  return new Date(instant).toISOString()
}

/** Local time `2026-11-16T14:05` of an instant in the site's zone. */
export function instantToSiteTime(instant: string | number, zone: string): string {
  const ms = typeof instant === 'number' ? instant : Date.parse(instant)
  return new Date(ms + offsetAt(ms, zone)).toISOString().slice(0, 16)
}
