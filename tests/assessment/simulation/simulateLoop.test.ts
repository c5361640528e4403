import { describe, expect, it } from 'vitest'
import type { LoopSetup } from '../../../shared/assessment/types'
import { simulateLoop } from '../../../shared/assessment/simulation/simulateLoop'
import type { LoopScenario } from '../../../shared/assessment/simulation/scenario'

/** Ranges of 0..100 on both sides, so that controller gain and process gain need no conversion. */
function setupOf(more: Partial<LoopSetup> = {}): LoopSetup {
  return {
    tag: 'TIC-1', type: 'temperature', pvLow: 0, pvHigh: 100, pvUnit: '%', opLow: 0, opHigh: 100, normalModes: ['AUTO'], tolerance: 1, priority: 2,
    deadTimeS: null, settlingS: 100, form: 'ideal', action: 'reverse', gain: 1, integralTimeS: null, derivativeTimeS: null, filterTimeS: null,
    setpointWeight: null, hysteresis: null, upstream: [], ...more,
  }
}

function scenarioOf(more: Partial<LoopScenario> = {}): LoopScenario {
  return {
    startMs: 0, durationS: 200, intervalS: 0.1, stepS: 0.02, seed: 1, process: { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime: 2 },
    workingPoint: { pv: 40, op: 40 }, valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: 40 }, cascade: false, loads: [], noise: 0, resolution: 0,
    events: [], decimals: { pv: 9, sp: 9, op: 9 }, compression: null, truth: { cause: 'healthy', spans: [], facts: {} }, ...more,
  }
}

const setpointStep = (from: number, to: number, at = 1): LoopScenario['setpoint'] => ({ kind: 'points', start: from, points: [{ at, value: to, ramp: false }] })
const overshoot = (setup: LoopSetup, scenario: LoopScenario) => {
  const { record } = simulateLoop(setup, { ...scenario, setpoint: setpointStep(40, 50) })
  return Math.max(...record.pv) - 50
}

describe('processes against exact solutions', () => {
  it('first order plus dead time, a step of the output in manual, dead time not a multiple of the step', () => {
    const { record } = simulateLoop(setupOf(), scenarioOf({
      intervalS: 0.5, stepS: 0.5, durationS: 60, process: { kind: 'fopdt', processGain: 1.7, timeConstant: 7, deadTime: 2.3 }, events: [{ at: 5, kind: 'manual', op: 50, nudgeEveryS: 0 }],
    }))
    record.t.forEach((ms, i) => {
      const since = ms / 1000 - 5 - 2.3
      expect(record.pv[i]).toBeCloseTo(40 + (since > 0 ? 17 * (1 - Math.exp(-since / 7)) : 0), 8)
    })
  })

  it('second order plus dead time', () => {
    const { record } = simulateLoop(setupOf(), scenarioOf({
      intervalS: 1, stepS: 1, durationS: 80, process: { kind: 'sopdt', processGain: 2, timeConstant: 10, timeConstant2: 4, deadTime: 1.25 }, events: [{ at: 0, kind: 'manual', op: 45, nudgeEveryS: 0 }],
    }))
    record.t.forEach((ms, i) => {
      const t = Math.max(0, ms / 1000 - 1.25)
      expect(record.pv[i]).toBeCloseTo(40 + 10 * (1 - (10 * Math.exp(-t / 10) - 4 * Math.exp(-t / 4)) / 6), 8)
    })
  })

  it('integrating: a ramp, and it stops at the brim of the vessel', () => {
    const { record } = simulateLoop(setupOf(), scenarioOf({
      intervalS: 1, stepS: 1, durationS: 200, process: { kind: 'integrating', processGain: 0.05, deadTime: 3.5 }, events: [{ at: 0, kind: 'manual', op: 50, nudgeEveryS: 0 }],
    }))
    record.t.forEach((ms, i) => expect(record.pv[i]).toBeCloseTo(Math.min(100, 40 + 0.5 * Math.max(0, ms / 1000 - 3.5)), 8))
  })

  it('furnace: rests at its working point, and loses gain as it gets hotter (radiation; definition of the model)', () => {
    const at = (op: number) => {
      const setup = setupOf({ pvHigh: 1400 })
      const scenario = scenarioOf({
        intervalS: 60, stepS: 10, durationS: 200_000, process: { kind: 'furnace', timeConstant: 1800, sensorLag: 20, deadTime: 30, ambient: 20, radiationShare: 0.7 },
        workingPoint: { pv: 1000, op: 50 }, events: [{ at: 0, kind: 'manual', op, nudgeEveryS: 0 }],
      })
      return simulateLoop(setup, scenario).record.pv.at(-1)!
    }
    expect(at(50)).toBeCloseTo(1000, 6)
    expect(at(60) - at(50)).toBeLessThan(at(50) - at(40))
    // balance of losses at the end: 0.3 by conduction, 0.7 by radiation, of 50 % output at 1000 degC
    const kelvin = (c: number) => (c + 273.15) ** 4 - 293.15 ** 4
    const hot = at(60)
    expect(50 * (0.3 * (hot - 20) / 980 + 0.7 * kelvin(hot) / kelvin(1000))).toBeCloseTo(60, 4)
  })
})

describe('closed loop against independent simulations', () => {
  // overshoot of set-point steps in %, exact dead time, by a Python program (first-order hold, Richardson) and a C program
  // (RK4) that agree to 0.034 percentage points; settings by the rule named
  const cases: [string, LoopScenario['process'], Partial<LoopSetup>, number][] = [
    ['SIMC PI, lag 10, dead time 2', { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime: 2 }, { gain: 2.5, integralTimeS: 10 }, 4.052],
    ['Ziegler-Nichols PI, lag 10, dead time 2', { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime: 2 }, { gain: 3.826091244800259, integralTimeS: 6.201268938348342 }, 43.7498],
    ['SIMC PI, lags 10 and 4, dead time 2', { kind: 'sopdt', processGain: 1, timeConstant: 10, timeConstant2: 4, deadTime: 2 }, { gain: 1.5, integralTimeS: 12 }, 13.4608],
    ['SIMC PI, integrating 0.1, dead time 2', { kind: 'integrating', processGain: 0.1, deadTime: 2 }, { gain: 2.5, integralTimeS: 16 }, 27.7424],
    ['AMIGO PID, lag 10, dead time 2', { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime: 2 }, { gain: 2.45, integralTimeS: 5.866666666666667, derivativeTimeS: 0.9433962264150944 }, 17.6571],
    ['AMIGO PID, lags 10 and 4, dead time 2', { kind: 'sopdt', processGain: 1, timeConstant: 10, timeConstant2: 4, deadTime: 2 }, { gain: 1.55, integralTimeS: 8.615384615384617, derivativeTimeS: 1.8181818181818183 }, 23.1992],
  ]
  it.each(cases)('%s', (_, process, tuning, expected) => {
    // the scan of 0.005 s adds half a scan of dead time; a PV step of 1 keeps the output off its limits
    const { record } = simulateLoop(setupOf(tuning), scenarioOf({ process, stepS: 0.005, intervalS: 0.1, durationS: 120, setpoint: setpointStep(40, 41) }))
    expect(Math.abs((Math.max(...record.pv) - 41) * 100 - expected)).toBeLessThan(0.25)
  })

  it.each([[1, 43.7499], [0.5, 2.9544], [0, 0]])('set-point weight %f with Ziegler-Nichols PI: overshoot %f %%', (weight, expected) => {
    const setup = setupOf({ gain: 3.826091244800259, integralTimeS: 6.201268938348342, setpointWeight: weight })
    const { record } = simulateLoop(setup, scenarioOf({ stepS: 0.005, durationS: 120, setpoint: setpointStep(40, 41) }))
    expect(Math.abs(Math.max(0, Math.max(...record.pv) - 41) * 100 - expected)).toBeLessThan(0.25)
  })

  it('integrated error of a load step is -Ti / Kc (closed form)', () => {
    const { record } = simulateLoop(setupOf({ gain: 2.5, integralTimeS: 10 }), scenarioOf({ durationS: 400, loads: [{ kind: 'steps', at: [5], size: [3], riseS: 0 }] }))
    const integral = record.pv.reduce((sum, y) => sum + (40 - y) * 0.1, 0)
    expect(integral / 3).toBeCloseTo(-4, 2)
  })

  it('series and parallel settings act as the ideal ones they equal (conversion by Åström, Hägglund 2006)', () => {
    const scenario = scenarioOf({ setpoint: setpointStep(40, 42) })
    const ideal = simulateLoop(setupOf({ gain: 1.5, integralTimeS: 12, derivativeTimeS: 8 / 3 }), scenario).record.pv
    const series = simulateLoop(setupOf({ form: 'series', gain: 1, integralTimeS: 8, derivativeTimeS: 4 }), scenario).record.pv
    const parallel = simulateLoop(setupOf({ form: 'parallel', gain: 1.5, integralTimeS: 8, derivativeTimeS: 4 }), scenario).record.pv
    ideal.forEach((y, i) => {
      expect(series[i]).toBeCloseTo(y, 6)
      expect(parallel[i]).toBeCloseTo(y, 6)
    })
  })
})

describe('on-off control against the closed form of exponential pieces', () => {
  // process gain, lag, dead time, output low and high, set point, half band -> peak to peak, period, share of time on
  const cases: [number, number, number, number, number, number, number, number, number, number][] = [
    [1, 10, 2, -1, 1, 0, 0, 0.3625384938, 7.331789868, 0.5],
    [2, 10, 5, -1, 1, 0, 0.2, 1.816489625, 19.59526154, 0.5],
    [1, 100, 10, 0, 100, 35, 0.5, 10.42109561, 45.23465479, 0.36320159],
    [0.8, 20, 15, 0, 100, 20, 1, 43.15540889, 53.89607532, 0.34714772],
  ]
  it.each(cases)('gain %f, lag %f s, dead time %f s', (processGain, timeConstant, deadTime, low, high, sp, half, swing, period, duty) => {
    const setup = setupOf({ form: 'onOff', gain: null, hysteresis: 2 * half, opLow: low, opHigh: high, pvLow: -100, pvHigh: 100 })
    const stepS = deadTime / 1000
    const { record } = simulateLoop(setup, scenarioOf({
      process: { kind: 'fopdt', processGain, timeConstant, deadTime }, stepS, intervalS: stepS, durationS: 24 * period, workingPoint: { pv: 0, op: 0 }, setpoint: { kind: 'constant', value: sp },
    }))
    const from = Math.floor(record.pv.length / 2)
    const pv = record.pv.subarray(from)
    const op = record.op!.subarray(from)
    const rises: number[] = []
    for (let i = 1; i < op.length; i++) if (op[i] > op[i - 1]) rises.push(i)
    const cycles = op.subarray(rises[0], rises.at(-1)!)
    const high2 = pv.reduce((a, b) => Math.max(a, b), -Infinity)
    const low2 = pv.reduce((a, b) => Math.min(a, b), Infinity)
    expect((high2 - low2) / swing).toBeCloseTo(1, 2)
    expect((rises.at(-1)! - rises[0]) * stepS / (rises.length - 1) / period).toBeCloseTo(1, 2)
    expect(cycles.filter(u => u === high).length / cycles.length).toBeCloseTo(duty, 2)
  })
})

describe('facts of the trade (common practice, no source)', () => {
  const furnace = (deadTime: number): LoopScenario => scenarioOf({
    intervalS: 10, stepS: 2, durationS: 40_000, process: { kind: 'furnace', timeConstant: 1200, sensorLag: 10, deadTime, ambient: 20, radiationShare: 0.4 },
    workingPoint: { pv: 600, op: 40 }, setpoint: { kind: 'constant', value: 600 },
  })
  const late = (pv: Float64Array) => pv.subarray(Math.floor(pv.length / 2))
  const swingOf = (pv: Float64Array) => Math.max(...late(pv)) - Math.min(...late(pv))

  it('on-off control of a furnace swings around the set point and never settles; the swing grows with dead time', () => {
    const setup = setupOf({ form: 'onOff', gain: null, hysteresis: 4, pvHigh: 1000 })
    const swings = [10, 30, 60].map((deadTime) => {
      const { pv } = simulateLoop(setup, furnace(deadTime)).record
      expect(Math.max(...late(pv))).toBeGreaterThan(600)
      expect(Math.min(...late(pv))).toBeLessThan(600)
      return swingOf(pv)
    })
    expect(swings[0]).toBeGreaterThan(4)
    expect(swings[1]).toBeGreaterThan(1.3 * swings[0])
    expect(swings[2]).toBeGreaterThan(1.3 * swings[1])
  })

  it.each([[1, 1], [1, 3], [2, 1.5]])('proportional action alone stops short by 1 / (1 + K Kc): K %f, Kc %f (closed form)', (processGain, gain) => {
    const { record } = simulateLoop(setupOf({ gain }), scenarioOf({ process: { kind: 'fopdt', processGain, timeConstant: 10, deadTime: 0.5 }, setpoint: setpointStep(40, 50), durationS: 400 }))
    expect(50 - record.pv.at(-1)!).toBeCloseTo(10 / (1 + processGain * gain), 4)
  })

  it('integral action removes the offset', () => {
    const { record } = simulateLoop(setupOf({ gain: 1, integralTimeS: 10 }), scenarioOf({ setpoint: setpointStep(40, 50), durationS: 400 }))
    expect(record.pv.at(-1)!).toBeCloseTo(50, 4)
  })

  it('more dead time with the same PI means more overshoot and at last hunting, above and below in turn', () => {
    const setup = setupOf({ gain: 2.5, integralTimeS: 10 })
    const at = (deadTime: number) => scenarioOf({ process: { kind: 'fopdt', processGain: 1, timeConstant: 10, deadTime }, durationS: 600 })
    const over = [2, 3, 4].map(deadTime => overshoot(setup, at(deadTime)))
    expect(over[1]).toBeGreaterThan(over[0] + 0.5)
    expect(over[2]).toBeGreaterThan(over[1] + 0.5)
    const { record } = simulateLoop(setup, { ...at(7), setpoint: setpointStep(40, 50) })
    const tail = late(record.pv)
    expect(Math.max(...tail)).toBeGreaterThan(55)
    expect(Math.min(...tail)).toBeLessThan(45)
  })

  it('derivative action brakes near the set point and lets the loop stand with dead time', () => {
    const scenario = scenarioOf({ process: { kind: 'sopdt', processGain: 1, timeConstant: 10, timeConstant2: 6, deadTime: 2 }, durationS: 300 })
    const without = overshoot(setupOf({ gain: 3, integralTimeS: 12 }), scenario)
    const having = overshoot(setupOf({ gain: 3, integralTimeS: 12, derivativeTimeS: 4 }), scenario)
    expect(having).toBeLessThan(0.6 * without)
  })

  it('quick recovery overshoots on heating up, a calm rise recovers slowly; a set-point weight takes the overshoot and leaves the recovery', () => {
    const load: LoopScenario['loads'] = [{ kind: 'steps', at: [10], size: [10], riseS: 0 }]
    const quick = setupOf({ gain: 3.6, integralTimeS: 6 })
    const calm = setupOf({ gain: 1.2, integralTimeS: 10 })
    const weighted = setupOf({ gain: 3.6, integralTimeS: 6, setpointWeight: 0 })
    const recovery = (setup: LoopSetup) => simulateLoop(setup, scenarioOf({ loads: load, durationS: 150 })).record.pv
    const iae = (pv: Float64Array) => pv.reduce((sum, y) => sum + Math.abs(y - 40), 0)
    expect(overshoot(quick, scenarioOf())).toBeGreaterThan(2)
    expect(overshoot(calm, scenarioOf())).toBeLessThan(0.1)
    expect(iae(recovery(calm))).toBeGreaterThan(2 * iae(recovery(quick)))
    expect(overshoot(weighted, scenarioOf())).toBeLessThan(0.5)
    const [a, b] = [recovery(quick), recovery(weighted)]
    a.forEach((y, i) => expect(b[i]).toBeCloseTo(y, 6))
  })

  it('an opened door drops the temperature, the output rises, and both come back', () => {
    const setup = setupOf({ pvHigh: 1000, gain: 4, integralTimeS: 400 })
    const { record } = simulateLoop(setup, { ...furnace(30), loads: [{ kind: 'pulses', at: [5000], widthS: 600, size: -20, recoveryS: 100 }] })
    const between = (x: Float64Array, fromS: number, toS: number) => x.subarray(fromS / 10, toS / 10)
    expect(Math.min(...between(record.pv, 5000, 6000))).toBeLessThan(599)
    expect(Math.max(...between(record.op!, 5000, 6000))).toBeGreaterThan(50)
    expect(record.pv.at(-1)!).toBeCloseTo(600, 1)
    expect(record.op!.at(-1)!).toBeCloseTo(40, 1)
  })

  it('a sticking valve makes a self-regulating loop hunt, a sound one does not; in manual it stops', () => {
    const setup = setupOf({ gain: 0.8, integralTimeS: 10 })
    const scenario = scenarioOf({ intervalS: 1, stepS: 0.5, durationS: 4000, setpoint: setpointStep(40, 44), valve: { kind: 'sticking', model: 'kano', stickBand: 5, slipJump: 3 } })
    expect(swingOf(simulateLoop(setup, scenario).record.pv)).toBeGreaterThan(2)
    expect(swingOf(simulateLoop(setup, { ...scenario, valve: { kind: 'sound' } }).record.pv)).toBeLessThan(1e-6)
    const manual = simulateLoop(setup, { ...scenario, events: [{ at: 1800, kind: 'manual', op: null, nudgeEveryS: 0 }] }).record
    expect(swingOf(manual.pv)).toBeLessThan(1e-3)
  })

  it('a limited output does not wind up: the loop leaves the limit at once when the error changes sign', () => {
    const setup = setupOf({ gain: 2.5, integralTimeS: 10 })
    const { record } = simulateLoop(setup, scenarioOf({ intervalS: 1, stepS: 0.1, durationS: 900, setpoint: { kind: 'points', start: 40, points: [{ at: 10, value: 120, ramp: false }, { at: 600, value: 60, ramp: false }] } }))
    expect(record.op![599]).toBe(100)
    expect(record.op![601]).toBeLessThan(50)
  })
})

describe('events, sensor and historian', () => {
  const setup = setupOf({ gain: 1, integralTimeS: 10 })
  const base = scenarioOf({ intervalS: 1, stepS: 1, durationS: 3600, noise: 0.3, decimals: { pv: 2, sp: 2, op: 2 } })

  it('keeps to its spans: frozen, broken, shut down, not recorded', () => {
    const { record } = simulateLoop(setup, {
      ...base, events: [
        { at: 300, kind: 'sensor', fault: { kind: 'frozen' } }, { at: 600, kind: 'sensor', fault: null },
        { at: 900, kind: 'sensor', fault: { kind: 'burnout', value: 110 } }, { at: 1000, kind: 'sensor', fault: null },
        { at: 1500, kind: 'shutDown' }, { at: 1800, kind: 'startUp' },
        { at: 2500, kind: 'historian', recording: false }, { at: 2600, kind: 'historian', recording: true },
      ],
    })
    expect(new Set(record.pv.slice(300, 600)).size).toBe(1)
    expect(new Set(record.pv.slice(600, 700)).size).toBeGreaterThan(10)
    expect([...record.pv.slice(900, 1000)].every(y => y === 110)).toBe(true)
    expect([...record.op!.slice(1500, 1800)].every(u => u === 0)).toBe(true)
    expect([...record.mode!.slice(1500, 1800)].every(m => record.modeNames[m] === 'MAN')).toBe(true)
    expect(record.modeNames[record.mode![1800]]).toBe('AUTO')
    expect([...record.pv.slice(2500, 2600)].every(Number.isNaN)).toBe(true)
    expect(record.pv[2600]).toBe(record.pv[2600])
  })

  it('the same seed makes the same record, another seed another; inputs stay as they were', () => {
    const before = JSON.stringify([setup, base])
    const first = simulateLoop(setup, base).record
    expect(simulateLoop(setup, base).record.pv).toEqual(first.pv)
    expect(simulateLoop(setup, { ...base, seed: 2 }).record.pv).not.toEqual(first.pv)
    expect(JSON.stringify([setup, base])).toBe(before)
  })

  it('does not depend on a record made in between (shared buffers)', () => {
    const first = simulateLoop(setup, base).record
    simulateLoop(setup, { ...base, durationS: 9000, loads: [{ kind: 'coloured', standardDeviation: 3, timeConstantS: 20, seed: 5 }] })
    expect(simulateLoop(setup, base).record.pv).toEqual(first.pv)
  })

  it('reports only archived instants when a historian compresses, a subset of the interpolated record', () => {
    const compression = { technique: 'swingingDoor', pvDeviation: 1, opDeviation: 1, longestS: 600, report: 'archived' } as const
    const archived = simulateLoop(setup, { ...base, compression }).record
    const full = simulateLoop(setup, { ...base, compression: { ...compression, report: 'interpolated' } }).record
    expect(archived.t.length).toBeLessThan(full.t.length / 3)
    archived.t.forEach((t, i) => expect(archived.pv[i]).toBe(full.pv[t / 1000]))
  })

  it('truth: spans in epoch ms', () => {
    const { truth } = simulateLoop(setup, { ...base, startMs: 1000, truth: { cause: 'leftInManual', spans: [{ fromS: 60, toS: 90 }], facts: {} } })
    expect(truth).toMatchObject({ tag: 'TIC-1', cause: 'leftInManual', verdict: 'manual', spans: [{ fromMs: 61_000, toMs: 91_000 }] })
  })

  it('refuses steps that do not divide the interval, empty durations, points out of order', () => {
    expect(() => simulateLoop(setup, { ...base, stepS: 0.3 })).toThrow(/stepS must divide intervalS/)
    expect(() => simulateLoop(setup, { ...base, durationS: 0 })).toThrow(/durationS/)
    expect(() => simulateLoop(setup, { ...base, setpoint: { kind: 'points', start: 1, points: [{ at: 9, value: 1, ramp: false }, { at: 3, value: 1, ramp: false }] } })).toThrow(/ascend/)
  })
})
