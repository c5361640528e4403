import { describe, expect, it } from 'vitest'
import { simulateOnOff } from '../../../shared/control/onOff/simulateOnOff'
import { compareTunings } from '../../../shared/control/simulation/compareTunings'
import { doorOpened } from '../../../shared/control/simulation/doorOpened'
import { responseFigures } from '../../../shared/control/simulation/responseFigures'
import { simulateClosedLoop, type ClosedLoopCase } from '../../../shared/control/simulation/simulateClosedLoop'
import { valveTravelFromNoise } from '../../../shared/control/simulation/valveTravelFromNoise'
import type { IdealPid, ProcessModel } from '../../../shared/control/types'
import { normalNumbers } from '../helpers/normalNumbers'

// All of these are common practice, no source: what everybody who has run a furnace knows.
const furnace: ProcessModel = { kind: 'fopdt', processGain: 8, timeConstant: 900, deadTime: 60 }
const pi = (controllerGain: number, integralTime = Infinity, derivativeTime = 0): IdealPid => ({ controllerGain, integralTime, derivativeTime })
const heatUp = (controller: IdealPid, changes: Partial<ClosedLoopCase> = {}) => simulateClosedLoop({ model: furnace, controller, horizon: 12_000, step: 3, setpoint: { at: 0, size: 100 }, ...changes })
const max = (x: Float64Array) => x.reduce((a, b) => Math.max(a, b), -Infinity)
const min = (x: Float64Array) => x.reduce((a, b) => Math.min(a, b), Infinity)

describe('facts of the trade (common practice, no source)', () => {
  const onOff = (deadTime: number) => {
    const { pv, sp } = simulateOnOff({ processGain: 8, timeConstant: 900, deadTime, outputLow: 0, outputHigh: 100, setpoint: 400, hysteresis: 4 }, { horizon: 20_000, startPv: 20, step: 1 })
    return { pv: pv.slice(-8000), sp: sp[0] }
  }
  it('on-off control of a furnace swings around the set point and never settles', () => {
    const { pv, sp } = onOff(60)
    expect(max(pv)).toBeGreaterThan(sp + 2)
    expect(min(pv)).toBeLessThan(sp - 2)
  })
  it('its swing grows with dead time', () => {
    const swings = [10, 30, 60, 120].map(d => max(onOff(d).pv) - min(onOff(d).pv))
    for (let i = 1; i < swings.length; i++) expect(swings[i]).toBeGreaterThan(swings[i - 1])
  })
  it('proportional action alone settles short of the set point, less so with more gain: offset = step / (1 + K Kc)', () => {
    for (const gain of [0.1, 0.3, 0.8]) expect(100 - heatUp(pi(gain)).pv.at(-1)!).toBeCloseTo(100 / (1 + 8 * gain), 2)
  })
  it('integral action removes the offset', () => {
    expect(heatUp(pi(0.3, 900)).pv.at(-1)).toBeCloseTo(100, 2)
  })
  const withDeadTime = (deadTime: number, controller = pi(0.9, 900)) => heatUp(controller, { model: { ...furnace, deadTime }, horizon: 20_000 })
  it('with the same PI tuning more dead time means more overshoot', () => {
    const overshoots = [60, 90, 120, 150].map(d => responseFigures(withDeadTime(d)).overshootPercent)
    for (let i = 1; i < overshoots.length; i++) expect(overshoots[i]).toBeGreaterThan(overshoots[i - 1])
  })
  it('and at last sustained hunting, over- and undershoot alternating', () => {
    // L = 0.9 * 8 / 900 / s e^{-theta s}: a quarter turn at theta = pi / 2 / 0.008 = 196 s.
    const { pv } = withDeadTime(197)
    const late = pv.slice(-3000)
    expect(max(late)).toBeGreaterThan(120)
    expect(min(late)).toBeLessThan(80)
    let crossings = 0
    for (let k = 1; k < late.length; k++) if ((late[k] - 100) * (late[k - 1] - 100) < 0) crossings++
    expect(crossings).toBeGreaterThan(15)
  })
  it('derivative action brakes as the set point is approached and lets the same loop stand with dead time', () => {
    const slow: ProcessModel = { kind: 'sopdt', processGain: 8, timeConstant: 900, timeConstant2: 200, deadTime: 60 }
    const overshoot = (derivativeTime: number) => responseFigures(heatUp(pi(0.7, 900, derivativeTime), { model: slow, horizon: 20_000 })).overshootPercent
    expect(overshoot(130)).toBeLessThan(0.6 * overshoot(0))
    const hunting = (derivativeTime: number) => responseFigures(heatUp(pi(2, 900, derivativeTime), { model: slow, horizon: 20_000 })).settlingTime
    expect(hunting(0)).toBe(Infinity)
    expect(hunting(80)).toBeLessThan(6000)
  })
  const quick = pi(0.9, 240)
  const calm = pi(0.35, 900)
  const [a, b, filtered, weighted] = compareTunings([{ controller: quick }, { controller: calm }, { controller: quick, setpointFilterTime: 240 }, { controller: { ...quick, setpointWeight: 0 } }], { model: furnace, horizon: 8000, setpointChange: 100, upsets: [{ at: 0, size: -10 }] })
  it('one-degree-of-freedom tuning for quick recovery overshoots on heating up; tuning for a calm rise recovers slowly', () => {
    expect(a.setpoint.figures.overshootPercent).toBeGreaterThan(25)
    expect(b.setpoint.figures.overshootPercent).toBeLessThan(2)
    expect(b.load.figures.iae).toBeGreaterThan(4 * a.load.figures.iae)
  })
  it('a set-point filter or weight takes the overshoot away and leaves the recovery as it was', () => {
    for (const c of [filtered, weighted]) {
      expect(c.setpoint.figures.overshootPercent).toBeLessThan(a.setpoint.figures.overshootPercent / 3)
      expect(c.load.figures.iae).toBeCloseTo(a.load.figures.iae, 9)
      expect(c.margins).toEqual(a.margins)
    }
  })
  it('opening a furnace door drops the temperature and shows as a load upset, not as a fault of the loop', () => {
    const controller = pi(0.35, 900)
    const response = simulateClosedLoop({ model: furnace, controller, horizon: 8000, start: { pv: 400, op: 50 }, outputLimits: { low: 0, high: 100 }, upsets: doorOpened({ at: 500, openFor: 120, airDrop: 40, heatLoss: 30, chargeLoss: 10, chargeFor: 300 }) })
    const dropped = min(response.pv)
    expect(dropped).toBeLessThan(365)
    expect(response.pv.slice(0, 50).every(v => v === 400)).toBe(true)
    expect(max(response.op)).toBeGreaterThan(55)
    // It comes back by itself and stands still afterwards.
    expect(Math.abs(response.pv.at(-1)! - 400)).toBeLessThan(1)
  })
  it('more gain and derivative action move the valve more on the same noise', () => {
    const travel = (c: IdealPid) => valveTravelFromNoise(furnace, c, { standardDeviation: 0.5, interval: 5, normal: normalNumbers(7) })
    expect(travel(pi(0.7, 900))).toBeGreaterThan(1.8 * travel(pi(0.35, 900)))
    expect(travel(pi(0.35, 900, 60))).toBeGreaterThan(2 * travel(pi(0.35, 900)))
    // Closed form in white noise, P alone: 2 Kc sd / sqrt(pi) a sample (the loop hardly answers within a sample).
    expect(travel(pi(0.3)) / (3600 / 5 * 2 * 0.3 * 0.5 / Math.sqrt(Math.PI))).toBeGreaterThan(0.9)
    expect(travel(pi(0.3)) / (3600 / 5 * 2 * 0.3 * 0.5 / Math.sqrt(Math.PI))).toBeLessThan(1.1)
  })
})
