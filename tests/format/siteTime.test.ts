import { describe, expect, it } from 'vitest'
import { instantToSiteTime, siteTimeToInstant } from '../../shared/format/siteTime'

describe('local times of the site', () => {
  // Clock changes by directive 2000/84/EC: last Sunday of March and October, 01:00 UTC.
  it('summer and winter', () => {
    expect(siteTimeToInstant('2026-07-01T12:00', 'Europe/Berlin')).toBe('2026-07-01T10:00:00.000Z')
    expect(siteTimeToInstant('2026-12-01T12:00', 'Europe/Berlin')).toBe('2026-12-01T11:00:00.000Z')
    expect(siteTimeToInstant('2026-07-01T12:00', 'Asia/Kathmandu')).toBe('2026-07-01T06:15:00.000Z')
  })
  it('the doubled hour is the earlier one, the skipped one goes by the offset before', () => {
    expect(siteTimeToInstant('2026-10-25T01:30', 'Europe/London')).toBe('2026-10-25T00:30:00.000Z')
    expect(siteTimeToInstant('2026-03-29T01:30', 'Europe/London')).toBe('2026-03-29T01:30:00.000Z')
  })
  it('there and back', () => {
    for (const zone of ['UTC', 'Europe/London', 'America/St_Johns', 'Australia/Lord_Howe']) {
      for (const local of ['2026-01-05T00:00', '2026-06-15T23:59', '2026-10-25T12:00']) expect(instantToSiteTime(siteTimeToInstant(local, zone), zone)).toBe(local)
    }
  })
  it('what is no time is left for the server to refuse', () => {
    expect(siteTimeToInstant('', 'UTC')).toBe('')
  })
})
