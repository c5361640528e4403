import { describe, expect, it } from 'vitest'
import { changePoint } from '../../../shared/assessment/history/changePoint'
import { weekChange } from '../../../shared/assessment/history/weekChange'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'

// Annual flow of the Nile at Aswan 1871-1970, 1e8 m^3: the data set `Nile` of R's package datasets (Durbin, Koopman
// 2001); typed from memory. The change after 1898 is the published one (Cobb 1978, Biometrika 65:243-251).
const nile = Float64Array.from([
  1120, 1160, 963, 1210, 1160, 1160, 813, 1230, 1370, 1140, 995, 935, 1110, 994, 1020, 960, 1180, 799, 958, 1140, 1100, 1210, 1150, 1250, 1260, 1220, 1030, 1100,
  774, 840, 874, 694, 940, 833, 701, 916, 692, 1020, 1050, 969, 831, 726, 456, 824, 702, 1120, 1100, 832, 764, 821, 768, 845, 864, 862, 698, 845, 744, 796, 1040,
  759, 781, 865, 845, 944, 984, 897, 822, 1010, 771, 676, 649, 846, 812, 742, 801, 1040, 860, 874, 848, 890, 744, 749, 838, 1050, 918, 986, 797, 923, 975, 815,
  1020, 906, 901, 1170, 912, 746, 919, 718, 714, 740,
])

describe('changePoint', () => {
  it('finds the published change of the Nile after 1898', () => {
    const { at, pValue } = changePoint(nile)
    expect(1871 + at).toBe(1899)
    expect(pValue).toBeLessThan(1e-6)
  })
  it('equals the definition: sum over pairs of sign(earlier - later)', () => {
    const random = seededRandom(3)
    const x = Float64Array.from({ length: 40 }, () => random.integer(9))
    const u = (t: number) => { let s = 0; for (let i = 0; i < t; i++) for (let j = t; j < 40; j++) s += Math.sign(x[i] - x[j]); return Math.abs(s) }
    const all = Array.from({ length: 39 }, (_, k) => u(k + 1))
    expect(changePoint(x).statistic).toBeCloseTo(Math.max(...all), 9)
    expect(changePoint(x).at).toBe(all.indexOf(Math.max(...all)) + 1)
  })
  it('does not mind a change of scale or the direction of time', () => {
    const scaled = changePoint(nile.map(v => 3 * v + 7))
    expect(scaled).toEqual(changePoint(nile))
    expect(changePoint(nile.slice().reverse()).at).toBe(nile.length - scaled.at)
  })
  it('finds nothing in a constant series, and false alarms stay at their level', () => {
    expect(changePoint(new Float64Array(30).fill(2)).pValue).toBe(1)
    const random = seededRandom(8)
    let alarms = 0
    for (let run = 0; run < 1000; run++) if (changePoint(Float64Array.from({ length: 28 }, () => random.normal())).pValue < 0.05) alarms++
    expect(alarms).toBeLessThan(65)
  })
  it('refuses too few values and ones that are not finite', () => {
    expect(() => changePoint(new Float64Array(3))).toThrow(/too few/)
    expect(() => changePoint(Float64Array.of(1, 2, NaN, 4))).toThrow(/finite/)
  })
})

describe('weekChange', () => {
  const steady = 's'.repeat(168)
  const bad = ('h'.repeat(9) + 's'.repeat(15)).repeat(7)
  it('marks a loop that became worse, with the week in which it began', () => {
    expect(weekChange([{ week: '2026-W45', ribbon: steady }, { week: '2026-W46', ribbon: steady }, { week: '2026-W47', ribbon: bad }])).toMatchObject({ mark: 'worse', since: '2026-W47', hoursPerWeekBefore: 0, hoursPerWeekAfter: 63 })
  })
  it('marks a loop that became better weeks ago and stayed so', () => {
    expect(weekChange([{ week: '2026-W44', ribbon: bad }, { week: '2026-W45', ribbon: bad }, { week: '2026-W46', ribbon: steady }, { week: '2026-W47', ribbon: steady }])).toMatchObject({ mark: 'better', since: '2026-W46' })
  })
  it('says nothing on one bad day, on steady weeks, on one week alone, or where data are missing', () => {
    const oneDay = 'h'.repeat(24) + 's'.repeat(144)
    expect(weekChange([{ week: '2026-W46', ribbon: steady }, { week: '2026-W47', ribbon: oneDay }])).toBeNull()
    expect(weekChange([{ week: '2026-W46', ribbon: steady }, { week: '2026-W47', ribbon: steady }])).toBeNull()
    expect(weekChange([{ week: '2026-W47', ribbon: bad }])).toBeNull()
    expect(weekChange([{ week: '2026-W46', ribbon: '.'.repeat(168) }, { week: '2026-W47', ribbon: bad }])).toBeNull()
  })
})
