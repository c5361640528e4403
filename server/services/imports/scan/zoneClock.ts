const formatters = new Map<string, Intl.DateTimeFormat>()

function formatter(zone: string): Intl.DateTimeFormat {
  let found = formatters.get(zone)
  if (!found) {
    found = new Intl.DateTimeFormat('en-US', { timeZone: zone, hourCycle: 'h23', year: 'numeric', month: 'numeric', day: 'numeric', hour: 'numeric', minute: 'numeric', second: 'numeric' })
    formatters.set(zone, found)
  }
  return found
}

/** True when this machine knows the zone. */
export function isZone(zone: string): boolean {
  try {
    formatter(zone)
    return true
  }
  catch { return false }
}

function offsetAt(utc: number, zone: string): number {
  const p: Record<string, number> = {}
  for (const { type, value } of formatter(zone).formatToParts(utc)) p[type] = Number(value)
  return Date.UTC(p.year, p.month - 1, p.day, p.hour, p.minute, p.second) - Math.floor(utc / 1000) * 1000
}

const BUCKET_MS = 900_000
const DAY_MS = 86_400_000

/**
 * Local wall time (epoch ms as if it were UTC) to UTC in a zone. The doubled hour at the end of daylight saving is
 * resolved by order: the first passage, unless that would not come after the sample before it.
 */
export class ZoneClock {
  private bucket = NaN
  private first = 0
  private second = NaN
  private gap = false
  /** set by `toUtc`: the hour happens twice */
  ambiguous = false

  constructor(readonly zone: string, readonly descending = false) { formatter(zone) }

  /** @returns epoch ms, or NaN for a wall time that the clocks jump over */
  toUtc(local: number, before: number): number {
    const bucket = Math.floor(local / BUCKET_MS)
    if (bucket !== this.bucket) this.look(bucket)
    this.ambiguous = this.second === this.second
    if (this.gap) return NaN
    if (!this.ambiguous) return local - this.first
    const early = local - this.first
    const late = local - this.second
    return this.descending ? (late >= before ? early : late) : (early <= before ? late : early)
  }

  private look(bucket: number): void {
    const local = bucket * BUCKET_MS
    const offsets = [...new Set([offsetAt(local - DAY_MS, this.zone), offsetAt(local + DAY_MS, this.zone)])]
      .filter(offset => offsetAt(local - offset, this.zone) === offset).sort((a, b) => b - a)
    this.bucket = bucket
    this.gap = offsets.length === 0
    this.first = offsets[0] ?? 0
    this.second = offsets[1] ?? NaN
  }
}
