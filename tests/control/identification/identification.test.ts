import { describe, expect, it } from 'vitest'
import { compareModels } from '../../../shared/control/identification/compareModels'
import { fitModel } from '../../../shared/control/identification/fitModel'
import { fitOnStretch } from '../../../shared/control/identification/fitOnStretch'
import { solveSymmetric } from '../../../shared/control/identification/solveSymmetric'
import { unitResponse } from '../../../shared/control/identification/unitResponse'
import { simulateClosedLoop } from '../../../shared/control/simulation/simulateClosedLoop'
import type { ProcessModel } from '../../../shared/control/types'
import { normalNumbers } from '../helpers/normalNumbers'
import { simulatedTest } from './plants'

describe('unitResponse', () => {
  const step = Float64Array.from({ length: 200 }, (_, k) => k >= 20 ? 1 : 0)
  const ramp = Float64Array.from({ length: 200 }, (_, k) => Math.max(0, k - 20))
  it('held in steps: the step response of one and two lags with a dead time between samples (closed form)', () => {
    const one = unitResponse(step, 2, [15], 5, 'zero', 10, new Float64Array(200))
    const two = unitResponse(step, 2, [15, 6], 5, 'zero', 10, new Float64Array(200))
    for (let k = 25; k < 200; k++) {
      const t = Math.max(0, 2 * (k - 20) - 5)
      expect(one[k]).toBeCloseTo(1 - Math.exp(-t / 15), 12)
      expect(two[k]).toBeCloseTo(1 - (15 * Math.exp(-t / 15) - 6 * Math.exp(-t / 6)) / 9, 10)
    }
  })
  it('held along lines: the ramp response (closed form)', () => {
    const one = unitResponse(ramp, 2, [15], 6, 'first', 10, new Float64Array(200))
    for (let k = 25; k < 200; k++) {
      const t = Math.max(0, 2 * (k - 20) - 6) / 2
      expect(one[k]).toBeCloseTo(t - 7.5 * (1 - Math.exp(-t / 7.5)), 10)
    }
  })
  it('integrates, and throws where the dead time reaches before the record', () => {
    const sum = unitResponse(step, 2, [], 4, 'zero', 10, new Float64Array(200))
    expect(sum[199]).toBeCloseTo(2 * (199 - 20 - 2), 10)
    expect(() => unitResponse(step, 2, [15], 25, 'zero', 10, new Float64Array(200))).toThrow('before the first sample')
  })
})

describe('solveSymmetric', () => {
  it('solves and inverts the Hilbert matrix of order 4 (known inverse: 16, -120, ... 2800)', () => {
    const a = Float64Array.from({ length: 16 }, (_, i) => 1 / ((i >> 2) + (i & 3) + 1))
    const solved = solveSymmetric(a, Float64Array.of(1, 0, 0, 0))!
    ;[16, -120, 240, -140].forEach((v, i) => expect(solved.x[i]).toBeCloseTo(v, 7))
    expect(solved.inverse()[15]).toBeCloseTo(2800, 5)
    expect(solveSymmetric(Float64Array.of(1, 1, 1, 1), Float64Array.of(1, 1))).toBeNull()
  })
})

describe('fitModel', () => {
  const cases: ProcessModel[] = [
    { kind: 'fopdt', processGain: -1.5, timeConstant: 60, deadTime: 20 },
    { kind: 'sopdt', processGain: 2, timeConstant: 60, timeConstant2: 20, deadTime: 20 },
    { kind: 'integrating', processGain: 0.02, deadTime: 20 },
  ]
  const record = (model: ProcessModel, noise = 0.002, scale = 1, shift = 0) => {
    const { measured, op } = simulateClosedLoop({
      model, controller: { controllerGain: 1, integralTime: 60, derivativeTime: 0 }, horizon: 1600, step: 1, start: { pv: 20, op: 40 },
      manualOutput: t => 40 + (t < 200 ? 0 : t < 500 ? 5 : t < 900 ? -4 : 2), noise: { standardDeviation: noise, interval: 4, normal: normalNumbers(3) },
    })
    const every = (x: Float64Array) => x.filter((_, k) => k % 4 === 0)
    return { pv: every(measured).map(v => v * scale + shift), op: every(op) }
  }
  for (const model of cases) {
    it(`finds ${model.kind} again where there is hardly any noise`, () => {
      const fit = fitModel([record(model)], { kind: model.kind, interval: 4, excitation: 'manualMove', hold: 'zero' })
      if (fit.status !== 'ok') throw new Error(fit.reason)
      expect(fit.fitPercent).toBeGreaterThan(99)
      for (const [key, value] of Object.entries(model)) if (typeof value === 'number') expect(Math.abs((fit.model as unknown as Record<string, number>)[key] / value - 1)).toBeLessThan(key === 'deadTime' ? 0.06 : 0.03)
    })
  }
  it('gain scales with PV, nothing depends on its level', () => {
    const fit = (scale: number, shift: number) => fitModel([record(cases[0], 0.05, scale, shift)], { kind: 'fopdt', interval: 4, excitation: 'manualMove', hold: 'zero' })
    const a = fit(1, 0)
    const b = fit(10, 1000)
    if (a.status !== 'ok' || b.status !== 'ok') throw new Error('refused')
    expect(b.model.processGain / a.model.processGain).toBeCloseTo(10, 3)
    expect(b.model.deadTime).toBeCloseTo(a.model.deadTime, 2)
  })
  it('refuses plainly: OP at rest, PV that does not answer, too short, no stretch', () => {
    const normal = normalNumbers(5)
    const noise = (n: number) => Float64Array.from({ length: n }, normal)
    const options = { kind: 'fopdt', interval: 1 } as const
    expect(fitModel([{ pv: noise(300), op: new Float64Array(300).fill(50) }], options)).toMatchObject({ status: 'insufficient', reason: expect.stringContaining('OP does not move') })
    expect(fitModel([{ pv: noise(300), op: noise(300) }], options).status).toBe('insufficient')
    expect(fitModel([{ pv: noise(20), op: noise(20) }], options)).toMatchObject({ reason: expect.stringContaining('at least 40') })
    expect(fitModel([], options)).toMatchObject({ reason: expect.stringContaining('no stretch') })
  })
  it('refuses a loop at rest in automatic: upsets alone do not tell the process from its controller', () => {
    const model = cases[0]
    const { measured, op } = simulateClosedLoop({ model, controller: { controllerGain: -0.8, integralTime: 60, derivativeTime: 0 }, horizon: 3000, step: 1, load: t => Math.sin(t / 40) + Math.sin(t / 17), noise: { standardDeviation: 0.3, interval: 4, normal: normalNumbers(8) } })
    const every = (x: Float64Array) => x.filter((_, k) => k % 4 === 0)
    expect(fitModel([{ pv: every(measured), op: every(op) }], { kind: 'fopdt', interval: 4, maximumDeadTime: 60 }).status).toBe('insufficient')
  })
  it('throws on misuse and leaves its input alone', () => {
    expect(() => fitModel([{ pv: new Float64Array(50), op: new Float64Array(49) }], { kind: 'fopdt', interval: 1 })).toThrow('samples')
    expect(() => fitModel([{ pv: new Float64Array(50).fill(NaN), op: new Float64Array(50) }], { kind: 'fopdt', interval: 1 })).toThrow('not a number')
    expect(() => fitModel([], { kind: 'fopdt', interval: 0 })).toThrow('interval')
    const stretch = record(cases[0])
    const before = [stretch.pv.slice(), stretch.op.slice()]
    fitModel([stretch], { kind: 'fopdt', interval: 4 })
    expect([stretch.pv, stretch.op]).toEqual(before)
  })
})

describe('compareModels and fitOnStretch', () => {
  it('a model of one test predicts another one of the same plant', () => {
    const { model, stretches, interval, excitation } = simulatedTest(42, 'fopdt', false, 0.4)
    const { best, candidates, reason } = compareModels([stretches[0]], { interval, excitation, maximumDeadTime: 3 * model.deadTime })
    expect(candidates.map(c => c.kind)).toEqual(['fopdt', 'sopdt', 'integrating'])
    expect(reason.length).toBeGreaterThan(20)
    const used = best.status === 'ok' ? best : best.best!
    expect(fitOnStretch(used.model, stretches[1], interval).fitPercent).toBeGreaterThan(70)
    expect(fitOnStretch({ ...used.model, processGain: -used.model.processGain }, stretches[1], interval).fitPercent).toBeLessThan(20)
  })
})
