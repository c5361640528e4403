import { describe, expect, it } from 'vitest'
import { dayEdges } from '../../shared/ribbon/dayEdges'

describe('dayEdges', () => {
  it('lies on multiples of 24 in a plain week', () => {
    expect(dayEdges('2026-W47', 'Europe/Berlin')).toEqual([0, 24, 48, 72, 96, 120, 144])
  })
  // Dates of clock changes: EU Directive 2000/84/EC (last Sundays of March and October, so inside the last day);
  // Egypt changes on a Thursday night, 29/30 October 2026 (from memory of the tz database)
  it('keeps the days right when clocks change', () => {
    expect(dayEdges('2026-W13', 'Europe/Berlin')).toEqual([0, 24, 48, 72, 96, 120, 144])
    expect(dayEdges('2026-W44', 'Africa/Cairo')).toHaveLength(7)
  })
})
