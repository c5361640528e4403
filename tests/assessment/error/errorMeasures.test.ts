import { describe, expect, it } from 'vitest'
import { errorMeasures } from '../../../shared/assessment/error/errorMeasures'
import { onOffCycle } from '../../../shared/assessment/error/onOffCycle'
import { valveMovement } from '../../../shared/assessment/error/valveMovement'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from '../records'

const week = weekFrame('2026-W48', 'UTC')
const measure = (change: Partial<Parameters<typeof makeRecord>[0]>, tolerance = 1) =>
  errorMeasures(prepareRecord(makeRecord({ fromMs: week.hourEdges[0], intervalS: 10, n: 360, pv: () => 50, ...change }), makeSetup(), week), tolerance)

describe('errorMeasures', () => {
  // closed forms: a sine of amplitude A has mean absolute value 2A/pi and standard deviation A/sqrt 2
  it('measures a sine about the set point', () => {
    const m = measure({ n: 36_000, pv: i => 50 + 3 * Math.sin(2 * Math.PI * (i + 0.5) / 360.01) })
    expect(m.meanAbsoluteError).toBeCloseTo(6 / Math.PI, 3)
    expect(m.standardDeviation).toBeCloseTo(3 / Math.SQRT2, 3)
    expect(m.offset).toBeCloseTo(0, 3)
    // |3 sin x| <= 1 for a share (2 / pi) asin(1/3)
    expect(m.timeInTolerance).toBeCloseTo(2 / Math.PI * Math.asin(1 / 3), 2)
  })

  it('gives a triangle its quarter: mean absolute value A/2, deviation A/sqrt 3', () => {
    const m = measure({ n: 40_000, pv: i => 50 + 4 * (1 - Math.abs(((i + 0.5) % 400) / 100 - 2)) })
    expect(m.meanAbsoluteError).toBeCloseTo(2, 4)
    expect(m.standardDeviation).toBeCloseTo(4 / Math.sqrt(3), 4)
  })

  it('takes SP - PV for the error, so a PV below its set point gives a positive offset', () => {
    const m = measure({ pv: () => 48.5 })
    expect([m.offset, m.meanAbsoluteError, m.standardDeviation, m.timeInTolerance]).toEqual([1.5, 1.5, 0, 0])
  })

  it('counts an error of exactly the tolerance as within it', () => {
    expect(measure({ pv: () => 49 }).timeInTolerance).toBe(1)
  })

  it('looks at the normal mode only, except for the time in tolerance', () => {
    const m = measure({ pv: i => i < 180 ? 50 : 60, mode: i => i < 180 ? 'AUTO' : 'MAN' })
    expect([m.meanAbsoluteError, m.standardDeviation, m.errorSamples]).toEqual([0, 0, 180])
    expect([m.timeInTolerance, m.anySamples]).toEqual([0.5, 360])
  })

  it('never fills a gap', () => {
    const m = measure({ pv: i => i === 100 || i === 102 ? 60 : 50, skip: i => i === 101 })
    expect(m.errorSamples).toBe(359)
    expect(m.meanAbsoluteError).toBeCloseTo(20 / 359, 12)
  })

  it('is the same at every interval, shifts with nothing, and scales with the unit', () => {
    const sine = (periodS: number, intervalS: number, k = 1, shift = 0) => measure({ intervalS, n: Math.round(36_000 / intervalS), sp: () => 50 * k + shift, pv: i => k * (50 + 3 * Math.sin(2 * Math.PI * i * intervalS / periodS)) + shift })
    expect(sine(3600, 1).meanAbsoluteError).toBeCloseTo(sine(3600, 60).meanAbsoluteError, 2)
    expect(sine(3600, 10, 1, 20).meanAbsoluteError).toBeCloseTo(sine(3600, 10).meanAbsoluteError, 10)
    expect(sine(3600, 10, 0.5).meanAbsoluteError).toBeCloseTo(sine(3600, 10).meanAbsoluteError / 2, 10)
  })

  it('is not there without SP, without PV, or without a normal mode', () => {
    expect(measure({ sp: null }).meanAbsoluteError).toBeNaN()
    expect(measure({ sp: null, pv: i => i % 2 ? 51 : 49 }).standardDeviation).toBe(1)
    expect(measure({ pv: () => NaN }).standardDeviation).toBeNaN()
    expect(measure({ mode: () => 'MAN' }).meanAbsoluteError).toBeNaN()
    expect(() => measure({}, -1)).toThrow(RangeError)
  })
})

describe('valveMovement', () => {
  const whole = (op: Float64Array) => [{ begin: 0, end: op.length }]

  it('adds up the travel of a triangle: 4 amplitudes a period', () => {
    // +-5 % every 400 s at 10 s: 20 % a period, 216 periods a day
    const op = Float64Array.from({ length: 8640 }, (_, i) => 50 + 5 * (1 - Math.abs((i % 40) / 10 - 2)))
    const m = valveMovement(op, whole(op), 10, 100)
    expect(m.travelPerDay).toBeCloseTo(20 * 216, 6)
    // two turns a period
    expect(m.reversalsPerDay).toBeGreaterThan(2 * 216 - 3)
    expect(m.reversalsPerDay).toBeLessThan(2 * 216 + 1)
  })

  it('scales with the span and not with the interval', () => {
    const op = Float64Array.from({ length: 1000 }, (_, i) => i)
    expect(valveMovement(op, whole(op), 86.4, 2000).travelPerDay).toBeCloseTo(999 / 2000 * 100 / (999 * 86.4 / 86400), 8)
  })

  it('sees no reversal within the noise band', () => {
    const quiet = Float64Array.from({ length: 5000 }, (_, i) => 50 + 0.05 * ((i * 7919) % 13 - 6) / 6)
    expect(valveMovement(quiet, whole(quiet), 10, 100).reversalsPerDay).toBe(0)
    // normal noise of any size spans its own band: fewer than one turn in a hundred samples (86.4 a day at 10 s)
    const random = seededRandom(11)
    const noisy = Float64Array.from({ length: 20_000 }, () => 50 + 2 * random.normal())
    expect(valveMovement(noisy, whole(noisy), 10, 100).reversalsPerDay).toBeLessThan(86.4)
  })

  it('does not travel across a long gap', () => {
    const op = Float64Array.of(10, 10, 90, 90)
    expect(valveMovement(op, [{ begin: 0, end: 2 }, { begin: 2, end: 4 }], 10, 100).travelPerDay).toBe(0)
    expect(valveMovement(Float64Array.of(NaN, NaN), [{ begin: 0, end: 2 }], 10, 100).travelPerDay).toBeNaN()
  })
})

describe('onOffCycle', () => {
  it('reads period, duty and swing of a switching cycle', () => {
    const on = (i: number) => i % 60 < 15
    const op = Float64Array.from({ length: 6000 }, (_, i) => on(i) ? 100 : 0)
    const pv = Float64Array.from({ length: 6000 }, (_, i) => on(i) ? (i % 60) / 15 * 8 : 8 * (1 - ((i % 60) - 15) / 45))
    const c = onOffCycle(op, pv, [{ begin: 0, end: 6000 }], 10, 50)!
    expect(c.periodS).toBe(600)
    expect(c.duty).toBeCloseTo(0.25, 12)
    expect(c.swing).toBeCloseTo(8, 12)
  })
  it('needs three whole cycles', () => {
    expect(onOffCycle(Float64Array.of(0, 100, 0, 100), new Float64Array(4), [{ begin: 0, end: 4 }], 10, 50)).toBeNull()
  })
})
