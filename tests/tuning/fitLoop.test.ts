/** Stretches and models from a record whose truth is known, because it was simulated with it. */
import { describe, expect, it } from 'vitest'
import { fitLoop } from '../../server/services/tuning/fitLoop'
import { defaultSetup } from '../../shared/assessment/defaultSetup'
import { MODE_UNKNOWN, type LoopRecord, type LoopSetup } from '../../shared/assessment/types'
import { loopOfKnownModel, onOffOfKnownModel, TRUTH } from '../setup/tuningPlant'

const start = Date.UTC(2026, 10, 16)
const setup: LoopSetup = { tag: 'TIC-1', ...defaultSetup('temperature') }
function record({ pv, sp, op }: { pv: Float64Array, sp: Float64Array, op: Float64Array }): LoopRecord {
  return { t: Float64Array.from(pv, (_, i) => start + i * 10_000), pv, sp, op, mode: null, modeNames: [] }
}
const whole = (r: LoopRecord) => [start, start + r.t.length * 10_000] as const
const close = (value: number, truth: number, within: number) => expect(Math.abs(value / truth - 1)).toBeLessThan(within)

describe('fitLoop', () => {
  const r = record(loopOfKnownModel({ samples: 8640 }))
  const answer = fitLoop(r, setup, [], ...whole(r), null)

  it('finds every set-point move and says what each is worth', () => {
    const moves = answer.stretches.filter(s => s.kind === 'setpointMove')
    expect(moves.length).toBeGreaterThanOrEqual(6)
    expect(moves.every(s => s.usable && s.own !== null)).toBe(true)
  })
  it('finds gain, lag and dead time that were built in (10 %, the dead time within one interval or 10 %)', () => {
    const fit = answer.joint!.fits.find(f => f.kind === 'fopdt')!
    expect(fit.status).toBe('ok')
    close(fit.parameters.processGain!.value, TRUTH['TIC-5501'].processGain, 0.1)
    close(fit.parameters.timeConstant!.value, TRUTH['TIC-5501'].timeConstant, 0.1)
    expect(Math.abs(fit.parameters.deadTime!.value - TRUTH['TIC-5501'].deadTime)).toBeLessThanOrEqual(10)
  })
  it('measures the noise of PV that was put in', () => { close(answer.noise!.standardDeviation, 0.05, 0.15) })
  it('fits just the stretches that are named', () => {
    const [one] = answer.stretches.filter(s => s.chosen)
    const again = fitLoop(r, setup, [], ...whole(r), [{ fromMs: one!.fromMs, toMs: one!.toMs }])
    expect(again.stretches.filter(s => s.chosen).map(s => s.fromMs)).toEqual([one!.fromMs])
  })
  it('does not look into an outage, and says so', () => {
    const without = fitLoop(r, setup, [{ fromMs: start, toMs: start + 86_400_000 }], ...whole(r), null)
    expect(without.joint).toBeNull()
    expect(without.stretches.every(s => !s.usable && /outage/.test(s.reason))).toBe(true)
    expect(without.reason).not.toBe('')
  })
  it('finds moves of OP in manual', () => {
    const n = 1500
    const op = Float64Array.from({ length: n }, (_, i) => (i < 400 ? 40 : 46))
    const pv = Float64Array.from({ length: n }, (_, i) => 50 + (i < 402 ? 0 : 9 * (1 - Math.exp(-(i - 402) / 30))) + 0.02 * Math.sin(i * 12.9898) * Math.cos(i * 78.233))
    const manual: LoopRecord = { t: Float64Array.from(pv, (_, i) => start + i * 10_000), pv, sp: null, op, mode: new Uint8Array(n), modeNames: ['MAN'] }
    const found = fitLoop(manual, setup, [], ...whole(manual), null)
    expect(found.stretches.map(s => s.kind)).toEqual(['manualMove'])
    // 9 % of PV for 6 % of OP, a lag of 30 samples
    const fit = found.joint!.fits.find(f => f.kind === 'fopdt')!
    close(fit.parameters.processGain!.value, 1.5, 0.1)
    close(fit.parameters.timeConstant!.value, 300, 0.1)
  })
  it('finds slope and dead time of an on-off loop from its own cycle, where the lag is too long to tell', () => {
    const o = record(onOffOfKnownModel(6000))
    const onOff = fitLoop(o, { ...setup, pvHigh: 200, form: 'onOff', settlingS: 3600 }, [], ...whole(o), null)
    const fit = onOff.joint!.fits.find(f => f.kind === 'integrating')!
    const { processGain, timeConstant, deadTime } = TRUTH['TIC-5502']
    expect(fit.status).toBe('ok')
    close(fit.model!.processGain * 2, processGain / timeConstant, 0.1)
    expect(Math.abs(fit.model!.deadTime - deadTime)).toBeLessThanOrEqual(10)
  })
  it('takes no model whose sign does not fit the action of the loop', () => {
    const wrong = fitLoop(r, { ...setup, action: 'direct' }, [], ...whole(r), null)
    expect(wrong.joint!.fits.filter(f => f.model && f.model.processGain > 0).every(f => f.status === 'refused')).toBe(true)
  })
  it('refuses a record without OP, an empty one and one that stands still, each in a sentence', () => {
    expect(fitLoop({ ...r, op: null }, setup, [], ...whole(r), null).reason).toMatch(/no OP/)
    const empty: LoopRecord = { t: new Float64Array(0), pv: new Float64Array(0), sp: null, op: null, mode: null, modeNames: [] }
    expect(fitLoop(empty, setup, [], start, start + 1e7, null).reason).toMatch(/no samples/)
    const still = { ...r, pv: r.pv.map(() => 50), op: r.op!.map(() => 40), sp: r.sp!.map(() => 50), mode: new Uint8Array(r.t.length).fill(MODE_UNKNOWN) }
    const answer = fitLoop(still, setup, [], ...whole(still), null)
    expect(answer.joint).toBeNull()
    expect(answer.reason).not.toBe('')
  })
  it('leaves its input alone', () => {
    const copy = r.pv.slice()
    fitLoop(r, setup, [], ...whole(r), null)
    expect(r.pv).toEqual(copy)
  })
})
