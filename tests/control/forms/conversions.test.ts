import { describe, expect, it } from 'vitest'
import { fromIdeal } from '../../../shared/control/forms/fromIdeal'
import { gainFromEngineeringUnits, gainOrProportionalBand, gainToEngineeringUnits } from '../../../shared/control/forms/gainUnits'
import { idealToParallel } from '../../../shared/control/forms/idealToParallel'
import { idealToSeries } from '../../../shared/control/forms/idealToSeries'
import { parallelToIdeal } from '../../../shared/control/forms/parallelToIdeal'
import { seriesToIdeal } from '../../../shared/control/forms/seriesToIdeal'
import { integralTimeFromSeconds, integralTimeToSeconds } from '../../../shared/control/forms/timeUnits'
import { toIdeal } from '../../../shared/control/forms/toIdeal'
import type { DisplayedController } from '../../../shared/control/types'
import { referenceCases, relative } from '../helpers/reference'

const triple = (x: { controllerGain: number, integralTime: number, derivativeTime: number }) => [x.controllerGain, x.integralTime, x.derivativeTime]
const pid = ([controllerGain, integralTime, derivativeTime]: number[]) => ({ controllerGain, integralTime, derivativeTime })
const closeTo = (values: number[], expected: number[]) => values.forEach((v, i) => expect(relative(v, expected[i])).toBeLessThan(1e-12))

describe('forms against the algebra of Åström, Hägglund (2006), fixtures/reference/tuning.json', () => {
  for (const c of referenceCases('tuning').filter(c => c.id.startsWith('conv_series'))) {
    it(c.id, () => {
      const ideal = seriesToIdeal(pid(c.inputs.series))
      closeTo(triple(ideal), c.expected.ideal)
      const parallel = idealToParallel(ideal)
      closeTo([parallel.proportionalGain, parallel.integralGain, parallel.derivativeGain], c.expected.parallel)
      const back = idealToSeries(ideal)
      if (back.status !== 'ok') throw new Error(back.reason)
      if (c.expected.back_to_series) triple(back.value).forEach((v, i) => expect(relative(v, c.expected.back_to_series[i])).toBeLessThan(1e-7))
    })
  }
  for (const c of referenceCases('tuning').filter(c => c.id.startsWith('conv_ideal'))) {
    it(c.id, () => {
      const series = idealToSeries(pid(c.inputs.ideal))
      if (series.status !== 'ok') throw new Error(series.reason)
      closeTo(triple(series.value), c.expected.series)
    })
  }
  it('conv_units', () => {
    const { inputs: { Kc, Ti_s }, expected } = referenceCases('tuning').find(c => c.id === 'conv_units')!
    expect(gainOrProportionalBand(Kc)).toBeCloseTo(expected.PB_pct, 12)
    expect(integralTimeFromSeconds(Ti_s, 'min')).toBeCloseTo(expected.Ti_min, 12)
    expect(integralTimeFromSeconds(Ti_s, 'repeatsPerMin')).toBeCloseTo(expected.repeats_per_min, 12)
    expect(gainToEngineeringUnits(Kc, 400, 100)).toBeCloseTo(expected.Kc_eng_PV0_400, 12)
    expect(gainFromEngineeringUnits(expected.Kc_eng_PV0_400, 400, 100)).toBeCloseTo(Kc, 12)
    const parallel = fromIdeal({ controllerGain: Kc, integralTime: Ti_s, derivativeTime: 12 }, { form: 'parallel', gainUnit: 'gain', timeUnit: 's' })
    if (parallel.status !== 'ok') throw new Error(parallel.reason)
    closeTo([parallel.value.integral!, parallel.value.derivative!], [expected.Ki_per_s, expected.Kd_s])
  })
})

describe('a controller as displayed', () => {
  const shown = (changes: Partial<DisplayedController> = {}): DisplayedController => ({ form: 'ideal', action: 'reverse', gain: 2, gainUnit: 'gain', integral: 1.5, derivative: 0.25, timeUnit: 'min', ...changes })
  it('goes to the ideal form and back unchanged, in every form and unit', () => {
    for (const form of ['ideal', 'series', 'parallel'] as const) {
      for (const gainUnit of ['gain', 'proportionalBand'] as const) {
        for (const timeUnit of ['s', 'min', 'repeatsPerMin'] as const) {
          for (const action of ['direct', 'reverse'] as const) {
            for (const [integral, derivative] of [[1.5, 0.25], [0.7, 0], [null, 0.3], [null, 0]] as const) {
              const before = shown({ form, gainUnit, timeUnit, action, integral, derivative: timeUnit === 'repeatsPerMin' ? derivative / 20 : derivative })
              const ideal = toIdeal(before)
              if (ideal.status !== 'ok') throw new Error(ideal.reason)
              const after = fromIdeal(ideal.value, before)
              if (after.status !== 'ok') throw new Error(after.reason)
              expect(after.value.action).toBe(action)
              for (const key of ['gain', 'integral', 'derivative'] as const) {
                if (before[key] === null) expect(after.value[key]).toBeNull()
                else expect(Math.abs(after.value[key]! - before[key]!)).toBeLessThan(1e-12 * Math.max(1, before[key]!))
              }
            }
          }
        }
      }
    }
  })
  it('carries the direction in the sign of the gain', () => {
    expect(toIdeal(shown({ action: 'direct' }))).toMatchObject({ value: { controllerGain: -2, integralTime: 90, derivativeTime: 15 } })
  })
  it('reads 0 and null as integral action off (common practice, no source)', () => {
    expect(integralTimeToSeconds(0, 'repeatsPerMin')).toBe(Infinity)
    expect(integralTimeToSeconds(null, 's')).toBe(Infinity)
    expect(integralTimeFromSeconds(Infinity, 'min')).toBeNull()
  })
  it('explains what is impossible', () => {
    const complexZeros = fromIdeal({ controllerGain: 1, integralTime: 10, derivativeTime: 5 }, { form: 'series', gainUnit: 'gain', timeUnit: 's' })
    expect(complexZeros).toMatchObject({ status: 'impossible', reason: expect.stringContaining('at least 20 s') })
    expect(parallelToIdeal({ proportionalGain: 0, integralGain: 1, derivativeGain: 0 })).toMatchObject({ status: 'impossible', reason: expect.stringContaining('proportional gain is 0') })
    expect(parallelToIdeal({ proportionalGain: 1, integralGain: -1, derivativeGain: 0 })).toMatchObject({ status: 'impossible', reason: expect.stringContaining('different signs') })
  })
  it('throws on misuse and leaves its input alone', () => {
    expect(() => toIdeal(shown({ gain: 0 }))).toThrow('toIdeal: the gain must be positive')
    expect(() => toIdeal(shown({ integral: -1 }))).toThrow('must be positive')
    expect(() => gainOrProportionalBand(0)).toThrow('must be positive')
    expect(() => gainToEngineeringUnits(1, 0, 100)).toThrow('spans')
    expect(() => seriesToIdeal(pid([1, 0, 0]))).toThrow('seriesToIdeal')
    const frozen = Object.freeze(shown())
    toIdeal(frozen)
  })
})
