import { describe, expect, it } from 'vitest'
import { frequencyResponse } from '../../../shared/control/margins/frequencyResponse'
import { margins } from '../../../shared/control/margins/margins'
import { ultimatePoint } from '../../../shared/control/margins/ultimatePoint'
import { idealPid, processModel, referenceCases, relative } from '../helpers/reference'

const number = (x: number | 'inf' | null) => x === 'inf' || x === null ? Infinity : x
const same = (value: number, expected: number | 'inf' | null, tolerance: number) =>
  number(expected) === Infinity ? expect(value).toBe(Infinity) : expect(relative(value, number(expected))).toBeLessThan(tolerance)

function compare(got: ReturnType<typeof margins>, e: any, tolerance: number) {
  expect(got.stable).toBe(true)
  same(got.maximumSensitivity, e.Ms, tolerance)
  same(got.maximumComplementarySensitivity, e.Mt, tolerance)
  same(got.gainMargin, e.GM, tolerance)
  same(got.phaseMarginDeg, e.PM_deg, tolerance)
  same(got.delayMargin, e.DM, tolerance)
}

describe('margins against two independent implementations (fixtures/reference/tuning.json)', () => {
  // Skogestad (2003) Table 1, rounded as printed (from memory); exact where a closed form exists.
  for (const c of referenceCases('tuning').filter(c => c.id.startsWith('SIMC_table'))) {
    it(`${c.id}: the printed digits and the exact ones`, () => {
      const got = margins(processModel(c.inputs.process), idealPid(c.inputs))
      const p = c.expected.published
      for (const [value, printed] of [[got.gainMargin, p.GM], [got.maximumSensitivity, p.Ms], [got.maximumComplementarySensitivity, p.Mt], [got.delayMargin, p.DM_over_theta], [got.phaseCrossover!, p.w180_theta], [got.gainCrossover!, p.wc_theta]]) expect(Math.abs(value - printed)).toBeLessThan(c.tolerance.published_rounding)
      expect(Math.abs(got.phaseMarginDeg - p.PM)).toBeLessThan(0.06)
      compare(got, c.expected.computed, c.tolerance.computed_rel)
    })
  }
  for (const c of referenceCases('tuning').filter(c => c.id.startsWith('SIMC_PI_tau'))) {
    it(c.id, () => compare(margins(processModel(c.inputs.process), idealPid(c.inputs)), c.expected, c.tolerance.rel))
  }
  for (const c of referenceCases('tuning').filter(c => c.expected.margins_derivative_filter_N10)) {
    it(c.id, () => {
      const model = processModel(c.inputs.process)
      const controller = idealPid(c.expected)
      compare(margins(model, controller), c.expected.margins_derivative_filter_N10, c.tolerance.margins_rel)
      const e = c.expected.margins_ideal_derivative
      // Without roll-off the gain stays near 1 for ever; then the figures depend on where the sweep ends.
      const rollsOff = model.kind === 'fopdt' ? model.processGain * controller.controllerGain * controller.derivativeTime / model.timeConstant < 0.4 : true
      if (e && e.Ms < 5 && rollsOff) compare(margins(model, { ...controller, derivativeFilterFactor: Infinity }), e, 1e-5)
    })
  }
  for (const c of referenceCases('tuning').filter(c => c.id.endsWith('/ultimate'))) {
    it(c.id, () => {
      const point = ultimatePoint(processModel(c.inputs))!
      expect(relative(point.gain, c.expected.Ku)).toBeLessThan(c.tolerance.rel)
      expect(relative(point.period, c.expected.Pu)).toBeLessThan(c.tolerance.rel)
    })
  }
})

describe('margins, closed forms and edges', () => {
  const model = { kind: 'fopdt', processGain: 2, timeConstant: 10, deadTime: 3 } as const
  it('a delay-free first-order lag under P has Ms 1 and a phase margin from its gain (closed form)', () => {
    const got = margins({ kind: 'fopdt', processGain: 1, timeConstant: 5, deadTime: 0 }, { controllerGain: 3, integralTime: Infinity, derivativeTime: 0 })
    expect(got.gainMargin).toBe(Infinity)
    expect(got.phaseMarginDeg).toBeCloseTo(180 - Math.atan(Math.sqrt(8)) * 180 / Math.PI, 9)
    expect(got.maximumSensitivity).toBeCloseTo(1, 3)
  })
  it('scales with time and not with the split of the gain', () => {
    const c = { controllerGain: 1, integralTime: 10, derivativeTime: 1 }
    const a = margins(model, c)
    const b = margins({ ...model, processGain: -1, timeConstant: 600, deadTime: 180 }, { controllerGain: -2, integralTime: 600, derivativeTime: 60 })
    expect(b.maximumSensitivity).toBeCloseTo(a.maximumSensitivity, 7)
    expect(b.delayMargin).toBeCloseTo(60 * a.delayMargin, 6)
  })
  it('a gain at its margin, or the wrong way round, is not stable', () => {
    const c = { controllerGain: 1, integralTime: 10, derivativeTime: 0 }
    const { gainMargin } = margins(model, c)
    expect(margins(model, { ...c, controllerGain: 1.01 * gainMargin })).toMatchObject({ stable: false, maximumSensitivity: Infinity })
    expect(margins(model, { ...c, controllerGain: 0.99 * gainMargin }).stable).toBe(true)
    expect(margins(model, { ...c, controllerGain: -0.1 }).stable).toBe(false)
  })
  it('the measurement filter takes phase away', () => {
    const c = { controllerGain: 1, integralTime: 10, derivativeTime: 0 }
    expect(margins(model, { ...c, measurementFilterTime: 2 }).phaseMarginDeg).toBeLessThan(margins(model, c).phaseMarginDeg)
  })
  it('throws on misuse', () => {
    expect(() => margins(model, { controllerGain: 0, integralTime: 1, derivativeTime: 0 })).toThrow('controller gain')
    expect(() => margins(model, { controllerGain: 1, integralTime: -1, derivativeTime: 0 })).toThrow('a time')
    expect(() => frequencyResponse(model, { controllerGain: 1, integralTime: 1, derivativeTime: 0 }, 0)).toThrow('omega')
    expect(ultimatePoint({ ...model, deadTime: 0 })).toBeNull()
  })
})
