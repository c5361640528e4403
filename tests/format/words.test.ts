import { describe, expect, it } from 'vitest'
import { formatBytes, formatDuration } from '../../shared/format/duration'
import { formatDate, formatDateTime, formatHourOfWeek, formatMoment, formatTime, formatWeek } from '../../shared/format/date'
import { counted, listed, opening } from '../../shared/format/words'

describe('formatDuration', () => {
  it.each([[8.44, '8.4 s'], [45, '45 s'], [252, '4.2 min'], [2280, '38 min'], [7199, '120 min'], [12600, '3.5 h'], [4 * 86400, '4.0 d'], [0, '0 s']])('%d s is %s', (s, text) => {
    expect(formatDuration(s)).toBe(text)
  })
  it('cannot tell', () => expect(formatDuration(null)).toBe('\u2013'))
  it('bytes by IEC 80000-13 multiples', () => expect([0, 900, 3670016, 20 * 1024 ** 3].map(formatBytes)).toEqual(['0 B', '900 B', '3.50 MiB', '20.0 GiB']))
})

describe('dates in the site zone', () => {
  const at = '2026-11-17T13:05:00Z'
  it('follow the zone, summer time included', () => {
    expect(formatDate(at, 'Europe/Berlin')).toBe('17 Nov 2026')
    expect(formatTime(at, 'Europe/Berlin')).toBe('14:05')
    expect(formatTime('2026-07-17T13:05:30Z', 'Europe/Berlin', true)).toBe('15:05:30')
    expect(formatMoment(at, 'UTC')).toBe('Tue 17 Nov, 13:05')
    expect(formatDateTime(Date.parse('2026-09-01T22:30:00Z'), 'Asia/Tokyo')).toBe('2 Sep 2026, 07:30')
  })
  // dates of the weeks by ISO 8601: 2026 has 53 weeks, week 53 reaches into January
  it('weeks by their calendar dates', () => {
    expect(formatWeek('2026-W47')).toBe('Week 47, 16 to 22 Nov 2026')
    expect(formatWeek('2026-W53')).toBe('Week 53, 28 Dec 2026 to 3 Jan 2027')
    expect(formatWeek('2026-W40')).toBe('Week 40, 28 Sep to 4 Oct 2026')
  })
  it('hours of a week in which the clocks go back', () => {
    // 25 October 2026, 03:00 summer time becomes 02:00: the hour from 02:00 comes twice
    expect(formatHourOfWeek('2026-W43', 0, 'Europe/Berlin')).toBe('Mon 19 Oct, 00:00 to 01:00')
    expect(formatHourOfWeek('2026-W43', 146, 'Europe/Berlin')).toBe('Sun 25 Oct, 02:00 to 02:00')
    expect(formatHourOfWeek('2026-W43', 168, 'Europe/Berlin')).toBe('Sun 25 Oct, 23:00 to 00:00')
    expect(formatHourOfWeek('2026-W43', 169, 'Europe/Berlin')).toBe('')
  })
})

describe('words', () => {
  it('counts and lists', () => {
    expect([counted(1, 'loop'), counted(14, 'loop'), counted(2, 'Category', 'categories')]).toEqual(['1 loop', '14 loops', '2 categories'])
    expect([opening(9), opening(14), opening(0)]).toEqual(['Nine', '14', 'No'])
    expect([listed([]), listed(['a']), listed(['a', 'b']), listed(['a', 'b', 'c'])]).toEqual(['', 'a', 'a and b', 'a, b and c'])
  })
})
