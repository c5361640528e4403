import { describe, expect, it } from 'vitest'
import { drawScenario } from '../../../shared/assessment/simulation/drawScenario'
import { planPlant } from '../../../shared/assessment/simulation/planPlant'
import { CAUSES, CAUSE_VERDICT, type LoopScenario } from '../../../shared/assessment/simulation/scenario'
import { simulateLoop } from '../../../shared/assessment/simulation/simulateLoop'
import { simulatePlantLoop } from '../../../shared/assessment/simulation/simulatePlant'
import type { LoopRecord, LoopSetup } from '../../../shared/assessment/types'

const TYPES = ['flow', 'pressure', 'level', 'temperature', 'analysis'] as const
const meanError = (record: LoopRecord, from = 0, to = record.t.length) => {
  let sum = 0
  let n = 0
  for (let i = from; i < to; i++) if (record.pv[i] === record.pv[i]) { sum += Math.abs(record.sp![i] - record.pv[i]); n++ }
  return sum / n
}

describe('drawScenario', () => {
  it.each(TYPES.flatMap(type => CAUSES.map(cause => [cause, type] as const)))('%s on a %s loop: visible, with its truth, and the same again', (cause, type) => {
    const draw = () => drawScenario(cause, type, 77, { days: 5 })
    const { setup, scenario, truth } = draw()
    expect(draw()).toEqual({ setup, scenario, truth })
    expect(truth).toMatchObject({ tag: setup.tag, cause, verdict: CAUSE_VERDICT[cause] })
    for (const span of truth.spans) {
      expect(span.toMs).toBeGreaterThan(span.fromMs)
      expect(span.toMs).toBeLessThanOrEqual(scenario.startMs + scenario.durationS * 1000)
    }
    const { record } = simulateLoop(setup, { ...scenario, durationS: Math.min(scenario.durationS, 2 * 86_400) })
    const [from, to] = [0, record.t.length]
    const ratio = meanError(record, from, to) / setup.tolerance
    if (cause === 'healthy') expect(ratio).toBeLessThan(0.5)
    if (['tightTuning', 'stickingValve'].includes(cause)) expect(ratio).toBeGreaterThan(0.15)
  })

  it('frozen and saturated records look so inside their spans', () => {
    const frozen = drawScenario('sensorFrozen', 'temperature', 5, { days: 4 })
    const { record } = simulateLoop(frozen.setup, frozen.scenario)
    const inside = record.pv.filter((_, i) => record.t[i] >= frozen.truth.spans[0].fromMs && record.t[i] < frozen.truth.spans[0].toMs)
    expect(new Set(inside).size).toBe(1)
    const full = drawScenario('saturated', 'flow', 5, { days: 4 })
    const limited = simulateLoop(full.setup, full.scenario).record
    const share = limited.op!.filter((u, i) => limited.t[i] > full.truth.spans[0].fromMs + 3_600_000 && limited.t[i] < full.truth.spans[0].toMs && (u < 0.5 || u > 99.5)).length
      / limited.t.filter(t => t > full.truth.spans[0].fromMs + 3_600_000 && t < full.truth.spans[0].toMs).length
    expect(share).toBeGreaterThan(0.8)
  })

  it('honours the interval and the range that are given', () => {
    const { setup, scenario } = drawScenario('healthy', 'temperature', 1, { days: 1, intervalS: 15, range: { low: -20, high: 80, unit: 'degC', at: 5, direct: true, tolerance: 0.7 } })
    expect(scenario.intervalS).toBe(15)
    expect(setup).toMatchObject({ pvLow: -20, pvHigh: 80, pvUnit: 'degC', action: 'direct', tolerance: 0.7 })
    expect(scenario.workingPoint.pv).toBe(5)
  })

  it('says so when no draw can show the cause', () => {
    expect(() => drawScenario('sluggish', 'analysis', 1, { days: 0.05 })).toThrow(/no draw of sluggish on a analysis loop/)
  })
})

describe('plants', () => {
  const setup: LoopSetup = {
    tag: 'FIC-1', type: 'flow', pvLow: 0, pvHigh: 50, pvUnit: 'm3/h', opLow: 0, opHigh: 100, normalModes: ['AUTO'], tolerance: 1, priority: 2, deadTimeS: 2, settlingS: 30,
    form: 'ideal', action: 'reverse', gain: 0.6, integralTimeS: 6, derivativeTimeS: null, filterTimeS: null, setpointWeight: null, hysteresis: null, upstream: [],
  }
  const scenario: LoopScenario = {
    startMs: 0, durationS: 7200, intervalS: 2, stepS: 1, seed: 1, process: { kind: 'fopdt', processGain: 0.5, timeConstant: 4, deadTime: 2 }, workingPoint: { pv: 25, op: 50 },
    valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: 25 }, cascade: false, loads: [], noise: 0, resolution: 0, events: [], decimals: { pv: 6, sp: 6, op: 6 }, compression: null,
    truth: { cause: 'healthy', spans: [], facts: {} },
  }
  const place = (more: Partial<Parameters<typeof simulatePlantLoop>[0][number]> = {}) => ({ setup, scenario, area: 'a', description: '', primary: null, carriedFrom: [], ...more })

  it('an upset reaches a loop downstream with the period of its source, later by the delay, and in any order', () => {
    const sticking = place({ scenario: { ...scenario, setpoint: { kind: 'constant', value: 26 }, valve: { kind: 'sticking', model: 'kano', stickBand: 6, slipJump: 4 } } })
    const plan = [place({ carriedFrom: [{ source: 1, gain: 2, lagS: 0, delayS: 30 }] }), sticking]
    const member = simulatePlantLoop(plan, 0).record
    const source = simulatePlantLoop(plan, 1).record
    expect(simulatePlantLoop(plan, 0, new Map()).record.pv).toEqual(member.pv)
    const rises = (x: Float64Array, level: number) => { const at: number[] = []; for (let i = 1801; i < x.length; i++) if (x[i - 1] < level && x[i] >= level) at.push(i); return at }
    const [a, b] = [rises(source.pv, 26), rises(member.pv, 25)]
    expect(a.length).toBeGreaterThan(10)
    expect(Math.abs(a.length - b.length)).toBeLessThanOrEqual(1)
  })

  it('refuses upsets in a ring and unknown loops', () => {
    const from = (source: number) => [{ source, gain: 1, lagS: 0, delayS: 0 }]
    expect(() => simulatePlantLoop([place({ carriedFrom: from(1) }), place({ carriedFrom: from(0) })], 0)).toThrow(/ring/)
    expect(() => simulatePlantLoop([place()], 3)).toThrow(/0..0/)
  })

  it('cascade: the inner set point is the outer output over the range; the outer loop holds (common practice, no source)', () => {
    const outer = place({
      setup: { ...setup, tag: 'TIC-1', type: 'temperature', pvHigh: 200, gain: 2, integralTimeS: 300 },
      scenario: { ...scenario, intervalS: 10, stepS: 10, process: { kind: 'fopdt', processGain: 1.6, timeConstant: 300, deadTime: 20 }, workingPoint: { pv: 90, op: 50 }, setpoint: { kind: 'points', start: 90, points: [{ at: 600, value: 98, ramp: false }] } },
    })
    const inner = place({ primary: 0, scenario: { ...scenario, cascade: true } })
    const first = simulatePlantLoop([outer, inner], 0).record
    const second = simulatePlantLoop([outer, inner], 1).record
    for (let i = 0; i < first.t.length; i += 50) expect(second.sp![i * 5]).toBeCloseTo(first.op![i] / 2, 4)
    expect(first.pv.at(-1)!).toBeCloseTo(98, 2)
    // 8 degC at 1.6 degC per % of output: 5 % more, 2.5 m3/h
    expect(second.pv.at(-1)!).toBeCloseTo(27.5, 2)
    expect(second.modeNames[second.mode![0]]).toBe('CAS')
  })

  it('planPlant: unique tags, the same again, about two thirds healthy; balanced holds every cause', () => {
    const wishes = { loops: 60, days: 2, intervalS: 10, seed: 3, startMs: 0, mix: 'plant' as const }
    const plan = planPlant(wishes)
    expect(plan).toHaveLength(60)
    expect(new Set(plan.map(l => l.setup.tag)).size).toBe(60)
    expect(planPlant(wishes).map(l => l.setup)).toEqual(plan.map(l => l.setup))
    const healthy = plan.filter(l => l.scenario.truth.cause === 'healthy').length
    expect(healthy).toBeGreaterThan(30)
    expect(healthy).toBeLessThan(55)
    const causes = new Set(planPlant({ ...wishes, days: 7, loops: 14, mix: 'balanced' }).map(l => l.scenario.truth.cause))
    expect(causes.size).toBe(14)
  })
})
