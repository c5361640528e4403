import { describe, expect, it } from 'vitest'
import { responseFigures } from '../../../shared/control/simulation/responseFigures'
import { simulateClosedLoop } from '../../../shared/control/simulation/simulateClosedLoop'
import { simc } from '../../../shared/control/rules/simc'
import type { IdealPid, ProcessModel } from '../../../shared/control/types'
import { idealPid, processModel, referenceCases, relative } from '../helpers/reference'
import { normalNumbers } from '../helpers/normalNumbers'

const horizons: Record<string, number> = { P1: 720, P2: 2600, P3: 960, P4: 800, P5: 5000 }

describe('responses against two independent simulators (fixtures/reference/tuning.json)', () => {
  for (const c of referenceCases('tuning').filter(c => c.expected.IAE_setpoint !== undefined)) {
    it(c.id, () => {
      const model = processModel(c.inputs.process)
      const controller = idealPid(c.expected)
      const common = { model, controller, horizon: horizons[c.id.slice(0, 2)], step: model.deadTime / 200 }
      const servo = responseFigures(simulateClosedLoop({ ...common, setpoint: { at: 0, size: 1 } }))
      const load = responseFigures(simulateClosedLoop({ ...common, upsets: [{ at: 0, size: 1 }] }))
      expect(relative(servo.iae, c.expected.IAE_setpoint)).toBeLessThan(c.tolerance.IAE_rel)
      expect(relative(load.iae, c.expected.IAE_load)).toBeLessThan(c.tolerance.IAE_rel)
      expect(Math.abs(servo.overshootPercent - c.expected.overshoot_setpoint_pct)).toBeLessThan(c.tolerance.overshoot_abs)
    })
  }
})

describe('two degrees of freedom (fixtures/reference/twoDegreeOfFreedom.json; Åström, Hägglund)', () => {
  for (const c of referenceCases('twoDegreeOfFreedom').filter(c => c.inputs.process)) {
    it(c.id, () => {
      const model = processModel(c.inputs.process)
      const p = c.inputs.process
      const figures = responseFigures(simulateClosedLoop({
        model, controller: { ...idealPid(c.inputs), setpointWeight: c.inputs.b }, horizon: 30 * (p.theta + (p.tau ?? 10) + (p.tau2 ?? 0)), step: p.theta / 400, setpoint: { at: 0, size: 1 },
      }))
      expect(Math.abs(figures.overshootPercent - c.expected.overshoot_pct)).toBeLessThan(c.tolerance.overshoot_abs_pct)
      expect(relative(figures.iae, c.expected.IAE_vs_r)).toBeLessThan(c.tolerance.IAE_rel)
    })
  }
  it('set-point weight 0 equals a set-point filter with the integral time (C(s)F(s) identity, F = 1/(Ti s + 1))', () => {
    const model: ProcessModel = { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime: 2 }
    const controller = { controllerGain: 2.5, integralTime: 10, derivativeTime: 0 }
    const common = { model, horizon: 100, step: 0.01, setpoint: { at: 5, size: 1 } }
    const weight = simulateClosedLoop({ ...common, controller: { ...controller, setpointWeight: 0 } })
    const filter = simulateClosedLoop({ ...common, controller, setpointFilterTime: 10 })
    for (let k = 0; k < weight.pv.length; k += 50) expect(Math.abs(weight.pv[k] - filter.pv[k])).toBeLessThan(1e-5)
  })
})

describe('simulateClosedLoop, closed forms and edges', () => {
  const model: ProcessModel = { kind: 'fopdt', processGain: 2, timeConstant: 10, deadTime: 3 }
  const controller: IdealPid = { controllerGain: 0.8, integralTime: 10, derivativeTime: 0 }
  it('open loop: first- and second-order step responses (closed form)', () => {
    const step = (m: ProcessModel) => simulateClosedLoop({ model: m, controller, horizon: 60, step: 0.5, manualOutput: () => 1, start: { pv: 0, op: 0 } })
    const first = step(model)
    const second = step({ kind: 'sopdt', processGain: 2, timeConstant: 10, timeConstant2: 4, deadTime: 3 })
    const ramp = step({ kind: 'integrating', processGain: 2, deadTime: 3 })
    first.time.forEach((t, k) => {
      const s = Math.max(0, t - 3)
      expect(first.pv[k]).toBeCloseTo(2 * (1 - Math.exp(-s / 10)), 12)
      expect(second.pv[k]).toBeCloseTo(2 * (1 - (10 * Math.exp(-s / 10) - 4 * Math.exp(-s / 4)) / 6), 10)
      expect(ramp.pv[k]).toBeCloseTo(2 * s, 10)
    })
  })
  it('is linear, and a late step equals an early one, shifted', () => {
    const early = simulateClosedLoop({ model, controller, horizon: 100, step: 0.1, setpoint: { at: 0, size: 1 } })
    const late = simulateClosedLoop({ model, controller, horizon: 100, step: 0.1, setpoint: { at: 20, size: -3 }, start: { pv: 50, op: 30 } })
    for (let k = 0; k + 200 < early.pv.length; k += 10) {
      expect(late.pv[k + 200] - 50).toBeCloseTo(-3 * early.pv[k], 9)
      expect(late.op[k + 200] - 30).toBeCloseTo(-3 * early.op[k], 9)
    }
  })
  it('a step chosen by itself is fine enough: IAE within 0.1 % of a fine one', () => {
    for (const deadTime of [0.2, 3, 30]) {
      const m = { ...model, deadTime }
      const c = (simc(m) as { controller: IdealPid }).controller
      const run = (step?: number) => responseFigures(simulateClosedLoop({ model: m, controller: c, horizon: 300, step, setpoint: { at: 10, size: 1 }, upsets: [{ at: 150, size: 1 }] })).iae
      expect(relative(run(), run(deadTime / 400))).toBeLessThan(1e-3)
    }
  })
  it('holds the output within its limits and does not wind up', () => {
    const slow = { ...controller, integralTime: 3, controllerGain: 2 }
    const run = (integralTime: number, low: number, high: number) => simulateClosedLoop({ model, controller: { ...slow, integralTime }, horizon: 400, setpoint: { at: 0, size: 1 }, outputLimits: { low, high } })
    const limited = run(8, -0.55, 0.55)
    expect(Math.max(...limited.op)).toBe(0.55)
    // Without wind-up the output leaves the limit by the time PV has passed the set point, so the overshoot stays small.
    expect(responseFigures(limited).overshootPercent).toBeLessThan(10)
    expect(limited.pv.at(-1)).toBeCloseTo(1, 2)
  })
  it('noise: same seed, same response; PV carries it only through the loop', () => {
    const run = (seed: number) => simulateClosedLoop({ model, controller, horizon: 200, noise: { standardDeviation: 0.2, interval: 1, normal: normalNumbers(seed) } })
    expect(run(1).op).toEqual(run(1).op)
    expect(run(1).op).not.toEqual(run(2).op)
    const { measured, pv } = run(3)
    const mean = measured.reduce((sum, m, k) => sum + (m - pv[k]) ** 2, 0) / pv.length
    expect(Math.sqrt(mean)).toBeGreaterThan(0.15)
    expect(Math.sqrt(mean)).toBeLessThan(0.25)
  })
  it('a sticking valve under PI with integral action hunts; a sound one settles (common practice, no source)', () => {
    const run = (valve?: { stickBand: number, slipJump: number }) => simulateClosedLoop({ model, controller, horizon: 1500, setpoint: { at: 0, size: 5 }, valve })
    const swing = (x: Float64Array) => Math.max(...x.slice(-5000)) - Math.min(...x.slice(-5000))
    expect(swing(run().pv)).toBeLessThan(1e-3)
    expect(swing(run({ stickBand: 2, slipJump: 1 }).pv)).toBeGreaterThan(1)
  })
  it('throws on misuse and leaves its input alone', () => {
    expect(() => simulateClosedLoop({ model, controller, horizon: 0 })).toThrow('horizon')
    expect(() => simulateClosedLoop({ model, controller, horizon: 10, outputLimits: { low: 1, high: 0 } })).toThrow('limits')
    expect(() => simulateClosedLoop({ model: { ...model, deadTime: -1 }, controller, horizon: 10 })).toThrow('a time of the model')
    expect(() => simulateClosedLoop({ model, controller, horizon: 10, valve: { stickBand: 1, slipJump: 2 } })).toThrow('slip jump')
    simulateClosedLoop(Object.freeze({ model: Object.freeze({ ...model }), controller: Object.freeze({ ...controller }), horizon: 10 }))
  })
})
