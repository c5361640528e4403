import { describe, expect, it } from 'vitest'
import { formatChange, formatConfidence, formatCount, formatFull, formatNumber, formatPercent } from '../../shared/format/number'

const minus = '\u2212', thin = '\u202F', dash = '\u2013'

describe('formatNumber', () => {
  it.each([[12345, `12${thin}300`], [1234, '1230'], [999.6, '1000'], [9.996, '10.0'], [0.04567, '0.0457'], [-2.1, `${minus}2.10`], [38, '38.0'], [0, '0'], [-0, '0']])('%d is written %s', (value, text) => {
    expect(formatNumber(value)).toBe(text)
  })
  it('goes to powers of ten where zeros would have to be counted', () => {
    expect(formatNumber(2.5e-7)).toBe('2.50 × 10⁻⁷')
    expect(formatNumber(-1.234e9)).toBe(`${minus}1.23 × 10⁹`)
  })
  it('writes a dash for what cannot be told', () => {
    for (const nothing of [null, undefined, NaN, Infinity]) expect(formatNumber(nothing)).toBe(dash)
  })
  it('rounds as the decimal value says, for every magnitude', () => {
    for (let e = -3; e <= 6; e++) expect(Number(formatNumber(1.2345 * 10 ** e).replaceAll(thin, ''))).toBeCloseTo(1.23 * 10 ** e, 6 - Math.max(0, e))
  })
})

describe('other numbers', () => {
  it('counts keep all digits', () => {
    expect(formatCount(1234)).toBe('1234')
    expect(formatCount(43012)).toBe(`43${thin}012`)
  })
  it('changes carry their sign', () => {
    expect([15, -2, 0].map(formatChange)).toEqual(['+15', `${minus}2`, '0'])
    expect(formatChange(-0.2)).toBe('0')
  })
  it('percent has at most two decimals', () => {
    expect([0.38123, 1, 0.0014, 0.00001, 0.0434, 0].map(formatPercent)).toEqual(['38.1', '100', '0.14', '0', '4.34', '0'])
  })
  it('confidence never claims certainty', () => {
    expect([0.861, 1, 0].map(formatConfidence)).toEqual(['86 %', '99 %', '1 %'])
  })
  it('the tooltip has the value as it is', () => expect(formatFull(-0.123456789)).toBe(`${minus}0.123456789`))
})
