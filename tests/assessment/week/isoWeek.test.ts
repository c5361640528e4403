import { describe, expect, it } from 'vitest'
import { nextWeek, previousWeek, weekFrame, weekOf, weeksBetween } from '../../../shared/assessment/week/isoWeek'

const at = (iso: string) => Date.parse(iso)
const hours = (id: string, zone: string) => weekFrame(id, zone).hourEdges.length - 1

describe('ISO weeks', () => {
  // ISO 8601:2004, 3.2.2 and annex examples: 1995-01-01 is 1994-W52-7, 1996-12-31 is 1997-W01-2 (from memory);
  // the years with 53 weeks are those that begin on a Thursday, or on a Wednesday when a leap year.
  it.each([
    ['1995-01-01', '1994-W52'], ['1996-12-31', '1997-W01'], ['2005-01-01', '2004-W53'], ['2005-01-02', '2004-W53'],
    ['2005-12-31', '2005-W52'], ['2006-01-02', '2006-W01'], ['2007-12-30', '2007-W52'], ['2007-12-31', '2008-W01'],
    ['2008-12-28', '2008-W52'], ['2008-12-29', '2009-W01'], ['2009-12-31', '2009-W53'], ['2010-01-03', '2009-W53'],
    ['2020-12-31', '2020-W53'], ['2021-01-04', '2021-W01'], ['2026-12-31', '2026-W53'], ['2027-01-03', '2026-W53'],
  ])('%s lies in %s', (date, week) => {
    expect(weekOf(at(`${date}T12:00:00Z`), 'UTC')).toBe(week)
  })

  it('gives 53 weeks to exactly the 71 long years of a 400-year cycle', () => {
    // 71 of 400 years have 53 weeks: a property of the Gregorian calendar
    let long = 0
    for (let year = 2000; year < 2400; year++) if (weekOf(Date.UTC(year, 11, 28), 'UTC').endsWith('W53')) long++
    expect(long).toBe(71)
  })

  it('begins on Monday 00:00 local time', () => {
    expect(weekFrame('2026-W48', 'UTC').hourEdges[0]).toBe(at('2026-11-23T00:00:00Z'))
    expect(weekFrame('2026-W48', 'Europe/Berlin').hourEdges[0]).toBe(at('2026-11-22T23:00:00Z'))
    expect(weekFrame('2026-W48', 'Asia/Kolkata').hourEdges[0]).toBe(at('2026-11-22T18:30:00Z'))
    expect(weekFrame('2026-W48', 'America/New_York').hourEdges[0]).toBe(at('2026-11-23T05:00:00Z'))
    expect(weekFrame('2026-W48', 'Asia/Kathmandu').hourEdges[0]).toBe(at('2026-11-22T18:15:00Z'))
  })

  it('has 167 and 169 hours when the clocks change', () => {
    // European Union: last Sunday of March and October (Directive 2000/84/EC); in 2026 29 March and 25 October
    expect(hours('2026-W13', 'Europe/Berlin')).toBe(167)
    expect(hours('2026-W43', 'Europe/Berlin')).toBe(169)
    expect(hours('2026-W14', 'Europe/Berlin')).toBe(168)
    // United States: second Sunday of March, first of November (Energy Policy Act of 2005); 8 March, 1 November 2026
    expect(hours('2026-W10', 'America/New_York')).toBe(167)
    expect(hours('2026-W44', 'America/New_York')).toBe(169)
    // no clock change in India
    expect(hours('2026-W13', 'Asia/Kolkata')).toBe(168)
  })

  it('ends in a half-hour cell where the clocks move by half an hour (Lord Howe Island)', () => {
    const edges = weekFrame('2026-W14', 'Australia/Lord_Howe').hourEdges
    expect((edges[edges.length - 1] - edges[0]) / 3_600_000).toBe(168.5)
    expect(edges.length - 1).toBe(169)
    expect(edges[169] - edges[168]).toBe(1_800_000)
  })

  it('begins a day whose midnight does not exist at the jump (Cuba, Sunday 8 March 2026, 0:00 to 1:00)', () => {
    // the week itself begins on Monday; its end is a plain midnight, its length 167 hours
    expect(hours('2026-W10', 'America/Havana')).toBe(167)
  })

  it('edges of neighbouring weeks meet, and every edge lies in its week', () => {
    for (const zone of ['Europe/Berlin', 'America/New_York', 'Asia/Kolkata', 'Pacific/Chatham', 'UTC']) {
      let id = '2025-W50'
      for (let k = 0; k < 60; k++) {
        const edges = weekFrame(id, zone).hourEdges
        expect(weekOf(edges[0], zone)).toBe(id)
        expect(weekOf(edges[edges.length - 1] - 1, zone)).toBe(id)
        const following = nextWeek(id)
        expect(weekFrame(following, zone).hourEdges[0]).toBe(edges[edges.length - 1])
        expect(previousWeek(following)).toBe(id)
        id = following
      }
    }
  })

  it('lists the weeks of a span', () => {
    expect(weeksBetween(at('2026-12-27T22:00:00Z'), at('2027-01-04T00:00:00Z'), 'UTC')).toEqual(['2026-W52', '2026-W53'])
    expect(weeksBetween(at('2026-12-27T22:00:00Z'), at('2027-01-04T00:00:01Z'), 'UTC')).toEqual(['2026-W52', '2026-W53', '2027-W01'])
    expect(weeksBetween(5, 5, 'UTC')).toEqual([])
  })

  it('refuses what is no week, no time and no zone', () => {
    expect(() => weekFrame('2025-W53', 'UTC')).toThrow(/2025-W53/)
    expect(() => weekFrame('2026-W00', 'UTC')).toThrow(RangeError)
    expect(() => weekFrame('26-W1', 'UTC')).toThrow(RangeError)
    expect(() => weekOf(NaN, 'UTC')).toThrow(RangeError)
    expect(() => weekOf(0, 'Nowhere/Land')).toThrow(/not a time zone/)
  })
})
