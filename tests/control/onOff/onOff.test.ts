import { describe, expect, it } from 'vitest'
import { hysteresisForSwitchings } from '../../../shared/control/onOff/hysteresisForSwitchings'
import { onOffAdvice } from '../../../shared/control/onOff/onOffAdvice'
import { onOffCycle, type OnOffCycle, type OnOffLoop } from '../../../shared/control/onOff/onOffCycle'
import { simulateOnOff } from '../../../shared/control/onOff/simulateOnOff'
import { referenceCases, relative } from '../helpers/reference'

const cycle = (loop: OnOffLoop): OnOffCycle => {
  const result = onOffCycle(loop)
  if (result.status !== 'cycle') throw new Error(result.reason)
  return result
}
const furnace: OnOffLoop = { processGain: 8, timeConstant: 900, deadTime: 60, outputLow: 0, outputHigh: 100, setpoint: 400, hysteresis: 4 }

describe('onOffCycle against fixtures/reference/onOff.json (closed form derived and simulated there)', () => {
  for (const c of referenceCases('onOff').filter(c => c.id.startsWith('R'))) {
    const i = c.inputs
    const loop: OnOffLoop = { processGain: i.K, timeConstant: i.tau, deadTime: i.theta, outputLow: i.umin, outputHigh: i.umax, setpoint: i.r, hysteresis: 2 * i.eps_half_band }
    it(c.id, () => {
      const got = cycle(loop)
      const e = c.expected.closed_form
      for (const [value, expected] of [[got.peak, e.peak], [got.trough, e.trough], [got.swing, e.peak_to_peak], [got.period, e.period], [got.onTime, e.t_on], [got.offTime, e.t_off], [got.duty, e.duty_on]]) expect(relative(value, expected)).toBeLessThan(c.tolerance.closed_form_rel)
    })
    it(`${c.id}: the simulation of the project swings like the independent one`, () => {
      const s = c.expected.simulated
      const { pv } = simulateOnOff(loop, { horizon: 12 * s.period, startPv: i.r - i.eps_half_band - 0.1 * i.K, step: i.theta / 1000 })
      const tail = pv.slice(-Math.floor(pv.length / 4))
      expect(relative(Math.max(...tail) - Math.min(...tail), s.peak_to_peak)).toBeLessThan(c.tolerance.sim_rel)
    })
  }
  it('symmetric_compact and integrator_relay', () => {
    const [compact, integrator] = ['symmetric_compact', 'integrator_relay'].map(id => referenceCases('onOff').find(c => c.id === id)!)
    const a = compact.inputs
    const one = cycle({ processGain: a.K, timeConstant: a.tau, deadTime: a.theta, outputLow: -a.d, outputHigh: a.d, setpoint: 0, hysteresis: 2 * a.eps })
    expect(relative(one.swing / 2, compact.expected.amplitude)).toBeLessThan(1e-12)
    expect(relative(one.period, compact.expected.period)).toBeLessThan(1e-12)
    const b = integrator.inputs
    const two = cycle({ processGain: b.kprime, deadTime: b.theta, outputLow: -b.d, outputHigh: b.d, setpoint: 0, hysteresis: 2 * b.eps })
    expect(relative(two.swing / 2, integrator.expected.amplitude)).toBeLessThan(1e-10)
    expect(relative(two.period, integrator.expected.period)).toBeLessThan(1e-10)
  })
})

describe('onOffCycle, invariances and edges', () => {
  it('scales with PV and time', () => {
    const a = cycle(furnace)
    const b = cycle({ ...furnace, processGain: 16, setpoint: 800, hysteresis: 8, timeConstant: 1800, deadTime: 120 })
    expect(b.swing).toBeCloseTo(2 * a.swing, 9)
    expect(b.period).toBeCloseTo(2 * a.period, 9)
    expect(a.switchingsPerDay).toBeCloseTo(2 * 86_400 / a.period, 9)
  })
  it('a very long lag behaves as an integrator', () => {
    const lag = cycle({ processGain: 1e6, timeConstant: 1e7, deadTime: 2, outputLow: -1, outputHigh: 1, setpoint: 0, hysteresis: 0.1 })
    const integrator = cycle({ processGain: 0.1, deadTime: 2, outputLow: -1, outputHigh: 1, setpoint: 0, hysteresis: 0.1 })
    expect(relative(lag.period, integrator.period)).toBeLessThan(1e-4)
  })
  it('says why there is no cycle', () => {
    expect(onOffCycle({ ...furnace, setpoint: 900 })).toMatchObject({ status: 'noCycle', reason: expect.stringContaining('stays on') })
    expect(onOffCycle({ ...furnace, setpoint: 0 })).toMatchObject({ status: 'noCycle', reason: expect.stringContaining('stays off') })
    expect(onOffCycle({ ...furnace, timeConstant: undefined })).toMatchObject({ status: 'noCycle' })
  })
  it('throws on misuse', () => {
    expect(() => onOffCycle({ ...furnace, hysteresis: -1 })).toThrow('hysteresis')
    expect(() => onOffCycle({ ...furnace, outputHigh: -1 })).toThrow('high output')
    expect(() => onOffCycle({ ...furnace, deadTime: 0, hysteresis: 0 })).toThrow('infinitely often')
  })
})

describe('advice', () => {
  it('the hysteresis found gives the number asked for', () => {
    for (const wanted of [50, 150, 300]) {
      const found = hysteresisForSwitchings(furnace, wanted)
      if (found.status !== 'ok') throw new Error(found.reason)
      expect(cycle({ ...furnace, hysteresis: found.hysteresis }).switchingsPerDay).toBeCloseTo(wanted, 6)
    }
  })
  it('says that the dead time alone sets an upper end', () => {
    expect(hysteresisForSwitchings(furnace, 5000)).toMatchObject({ status: 'impossible', reason: expect.stringContaining('dead time alone') })
  })
  it('counts the life of the relay and offers time proportioning', () => {
    const advice = onOffAdvice(furnace, { wantedSwitchingsPerDay: 2000, ratedSwitchings: 1e6 })
    const expected = cycle(furnace)
    expect(advice.lifeDays).toBeCloseTo(1e6 / expected.switchingsPerDay, 6)
    expect(advice.timeProportioned.ripple).toBeLessThan(expected.swing)
    expect(advice.timeProportioned.switchingsPerDay).toBeLessThanOrEqual(2000 + 1e-9)
    expect(advice.sentences.join(' ')).toContain('never settles')
  })
})
