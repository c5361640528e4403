import { describe, expect, it } from 'vitest'
import { guessOutputRange, guessRange, typeOfTag } from '../../server/services/imports/guessLoop'

describe('guessRange', () => {
  it('begins at 0 and ends at a round limit with room above the data', () => {
    expect(guessRange(42, 61)).toEqual({ low: 0, high: 100 })
    expect(guessRange(3636, 3702)).toEqual({ low: 0, high: 5000 })
    expect(guessRange(0.2486, 0.2499)).toEqual({ low: 0, high: 0.5 })
    expect(guessRange(998, 1004)).toEqual({ low: 0, high: 2000 })
  })
  it('goes to both sides where the data are negative, and never is empty', () => {
    expect(guessRange(-12, 40)).toEqual({ low: -50, high: 50 })
    expect(guessRange(-3, -1)).toEqual({ low: -5, high: 0 })
    expect(guessRange(0, 0)).toEqual({ low: 0, high: 1 })
    expect(guessRange(7, 7)).toEqual({ low: 0, high: 10 })
  })
  it('is no wider when it is guessed again from what it enclosed', () => {
    const first = guessRange(42, 61)
    expect(guessRange(Math.min(42, first.low), 61).high).toBe(first.high)
  })
})

describe('guessOutputRange', () => {
  it('takes per cent for per cent and a fraction for a fraction', () => {
    expect(guessOutputRange(20, 60)).toEqual({ low: 0, high: 100 })
    expect(guessOutputRange(0.2, 0.61)).toEqual({ low: 0, high: 1 })
    expect(guessOutputRange(0, 100)).toEqual({ low: 0, high: 100 })
  })
})

describe('typeOfTag', () => {
  it('reads the first letter of the tag (ISA-5.1, table of identification letters)', () => {
    expect(['FIC-101', 'PIC 7', 'LIC2201', 'TIC-1204', 'AIC-3', 'PDIC-1302'].map(typeOfTag)).toEqual(['flow', 'pressure', 'level', 'temperature', 'analysis', 'pressure'])
    expect(typeOfTag('XYZ')).toBe('other')
  })
})
