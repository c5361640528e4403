/** What the desk shows, held to published values and to the definitions. */
import { describe, expect, it } from 'vitest'
import type { IdealPid, ProcessModel } from '../../shared/control/types'
import { composeSheet, cautionsOf } from '../../shared/tuning/composeSheet'
import { deskPreview, thinCurve } from '../../shared/tuning/deskPreview'
import { deskFigures, deskTunings, horizonFor } from '../../shared/tuning/deskTunings'
import { settingsText } from '../../shared/tuning/settingsText'
import { idealOf, settingNames, shownAs, storedController } from '../../shared/tuning/storedController'
import { makeSheetSchema } from '../../shared/schemas/tuning'
import { expectedOf } from '../../shared/tickets/expectedOf'

const model: ProcessModel = { kind: 'fopdt', processGain: 1, timeConstant: 8, deadTime: 1 }
const second = { form: 'ideal', gainUnit: 'gain', timeUnit: 's' } as const
const ok = <T>(c: { status: 'ok', value: T } | { status: 'impossible', reason: string } | null): T => { if (c?.status !== 'ok') throw new Error(c?.reason ?? 'null'); return c.value }

describe('tunings side by side', () => {
  const simc = deskTunings(model, 1, second).find(t => t.name === 'SIMC PI')!
  it('gives SIMC at the fast end of the slider as published: tauC = theta, so Kc = tau / (2 K theta), Ti = min(tau, 8 theta)', () => {
    // Skogestad (2003), J. Process Control 13:291-309
    expect(ok(simc.shown)).toMatchObject({ gain: 4, integral: 8, derivative: 0 })
  })
  it('has the published margins there: Ms 1.59, gain margin 3.14, phase margin 61.4 degrees, delay margin 2.14 theta', () => {
    // Skogestad (2003), table 1 (first-order process with tau <= 8 theta)
    const f = deskFigures(model, simc.ideal!, 60, null)
    expect(f.maximumSensitivity).toBeCloseTo(1.59, 2)
    expect(f.gainMargin).toBeCloseTo(3.14, 2)
    expect(f.phaseMarginDeg).toBeCloseTo(61.4, 1)
    expect(f.delayMargin).toBeCloseTo(2.14, 2)
  })
  it('has the load IAE of its closed form, Ti / Kc, where the response does not cross zero', () => {
    // integral error of PI after a unit load step at the input: Ti / Kc (Astrom, Hagglund 2006)
    const robust = deskTunings(model, 0.4, second).find(t => t.name === 'SIMC PI')!
    const { controllerGain, integralTime } = robust.ideal!
    expect(deskFigures(model, robust.ideal!, 400, null).loadIae / (integralTime / controllerGain)).toBeCloseTo(1, 2)
  })
  it('moves from robust to fast: less load error, more Ms', () => {
    const at = (p: number) => deskFigures(model, deskTunings(model, p, second)[0]!.ideal!, 300, null)
    const [slow, middle, fast] = [0, 0.5, 1].map(at)
    expect(slow!.loadIae).toBeGreaterThan(middle!.loadIae)
    expect(middle!.loadIae).toBeGreaterThan(fast!.loadIae)
    expect(slow!.maximumSensitivity).toBeLessThan(fast!.maximumSensitivity)
  })
  it('shows the same controller in every form and unit: previewed is what is shown', () => {
    for (const form of ['ideal', 'series', 'parallel'] as const) {
      for (const gainUnit of ['gain', 'proportionalBand'] as const) {
        for (const timeUnit of ['s', 'min', 'repeatsPerMin'] as const) {
          const t = deskTunings(model, 0.7, { form, gainUnit, timeUnit })[0]!
          const back = ok(idealOf(ok(t.shown)))
          expect(back).toEqual(t.ideal)
          expect(back.controllerGain / deskTunings(model, 0.7, second)[0]!.ideal!.controllerGain).toBeCloseTo(1, 2)
        }
      }
    }
  })
  it('shows direct action for a process that falls when OP rises', () => {
    const t = deskTunings({ ...model, processGain: -1 }, 0.7, second)[0]!
    expect(ok(t.shown).action).toBe('direct')
    expect(t.ideal!.controllerGain).toBeLessThan(0)
  })
  it('explains a PID that a series controller cannot have', () => {
    const shown = shownAs({ controllerGain: 1, integralTime: 10, derivativeTime: 5 }, { ...second, form: 'series' })
    expect(shown).toMatchObject({ status: 'impossible' })
    expect((shown as { reason: string }).reason).toMatch(/series/)
  })
  it('calls a process that runs away not stable, with no figure made up', () => {
    const f = deskFigures(model, { controllerGain: 50, integralTime: 8, derivativeTime: 0 }, 60, null)
    expect(f).toMatchObject({ stable: false, loadIae: Infinity, noiseTravelPerHour: null })
  })
  it('offers averaging control for an integrating level only', () => {
    const names = (m: ProcessModel) => deskTunings(m, 0.5, second, { largestUpset: 10, allowedDeviation: 20 }).map(t => t.name)
    expect(names({ kind: 'integrating', processGain: 0.001, deadTime: 5 })).toContain('Averaging level PI')
    expect(names(model)).not.toContain('Averaging level PI')
  })
})

describe('preview', () => {
  const old: IdealPid = { controllerGain: 2, integralTime: 8, derivativeTime: 0 }
  const conditions = { model, horizon: horizonFor(model, [old]), start: { pv: 50, op: 50 }, setpointChange: 5, loadChange: 10, noise: null, valve: null, door: null }
  const candidates = [{ name: 'as found', ideal: old, setpointFilterTime: 0 }, { name: 'as proposed', ideal: { ...old, controllerGain: 1 }, setpointFilterTime: 0 }]
  it('ends at the new set point with OP moved by change over gain', () => {
    const { setpoint } = deskPreview(candidates, conditions)
    const { pv, op } = setpoint[0]!.response
    expect(pv[pv.length - 1]).toBeCloseTo(55, 1)
    expect(op[op.length - 1]).toBeCloseTo(55, 1)
  })
  it('swings with a sticking valve and integral action, and not without', () => {
    // the facts: stick band and integral action make a limit cycle (common practice, no source); noise starts it
    const swing = (valve: { stickBand: number, slipJump: number } | null) => { const { pv } = deskPreview(candidates, { ...conditions, horizon: 400, valve, noise: { standardDeviation: 0.02, intervalS: 1 } }).load[0]!.response; const tail = pv.slice(-Math.floor(pv.length / 3)); return Math.max(...tail) - Math.min(...tail) }
    expect(swing({ stickBand: 4, slipJump: 2 })).toBeGreaterThan(5 * swing(null))
  })
  it('keeps OP within its limits and says when it stands there', () => {
    const c = deskPreview(candidates, { ...conditions, start: { pv: 50, op: 97 }, setpointChange: 20 }).setpoint[0]!
    expect(Math.max(...c.response.op)).toBeLessThanOrEqual(100)
    expect(c.reachesLimit).toBe(true)
  })
  it('lowers PV when a door is opened', () => {
    const { load } = deskPreview(candidates, { ...conditions, door: { openFor: 4, airDrop: 5 } })
    expect(Math.min(...load[0]!.response.pv)).toBeLessThan(48)
    expect(Math.max(...load[0]!.response.op)).toBeGreaterThan(50)
  })
  it('meets old and new with the same noise', () => {
    const { load } = deskPreview([candidates[0]!, candidates[0]!], { ...conditions, noise: { standardDeviation: 0.2, intervalS: 1 } })
    expect(load[0]!.response.measured).toEqual(load[1]!.response.measured)
  })
  it('keeps the extremes of a thinned curve', () => {
    const y = Float64Array.from({ length: 5000 }, (_, i) => (i === 1234 ? 9 : i === 3210 ? -9 : Math.sin(i / 300)))
    const thin = thinCurve(Float64Array.from(y, (_, i) => i), y, 200)
    expect(thin.length).toBeLessThanOrEqual(210)
    expect(Math.max(...thin.map(p => p[1]))).toBe(9)
    expect(Math.min(...thin.map(p => p[1]))).toBe(-9)
  })
})

describe('change sheet', () => {
  const loop = { tag: 'TIC-1', description: '', area: null, unit: '', type: 'temperature', pvUnit: '°C', pvLow: 0, pvHigh: 500, opLow: 0, opHigh: 100 }
  const asFound = storedController({ form: 'ideal', action: 'reverse', gain: 1, gainUnit: 'gain', integralTime: 16, derivativeTime: null, timeUnit: 's', filterTimeS: null, setpointWeight: null })!
  const input = (proposed: object, more: object = {}) => makeSheetSchema.parse({ version: 1, proposed: { ...asFound, ...proposed }, rule: 'SIMC PI', model: { origin: 'data', process: model, fitPercent: 90 }, reasons: 'sluggish', stopCriteria: ['PV leaves the band'], wayBack: 'as found', ...more })
  const around = { loop, asFound, verdict: 'sluggish' as const, verdictConfidence: 0.8 }
  it('predicts the load IAE ratio that the closed form gives, (Ti / Kc) new over old', () => {
    const made = composeSheet(input({ gain: 2, integral: 8 }), around)
    if (made.status !== 'ok') throw new Error(made.reason)
    expect(made.sheet.benefit.expectedIaeRatio!).toBeCloseTo((8 / 2) / (16 / 1), 2)
    expect(made.sheet.cautions.filter(c => c.code === 'always').length).toBeGreaterThanOrEqual(3)
  })
  it('cautions from just above a factor of 2, and not at 2', () => {
    const codes = (gain: number) => { const made = composeSheet(input({ gain, integral: 16 }), around); return made.status === 'ok' ? made.sheet.cautions.map(c => c.code) : [] }
    expect(codes(2)).not.toContain('largeChange')
    expect(codes(2.1)).toContain('largeChange')
  })
  it('refuses what would not be stable, and what acts the wrong way', () => {
    expect(composeSheet(input({ gain: 40, integral: 8 }), around)).toMatchObject({ status: 'refused', path: 'proposed' })
    expect(composeSheet(input({ action: 'direct' }), around)).toMatchObject({ status: 'refused', path: 'proposed' })
  })
  it('predicts nothing where the tuning as found is not known', () => {
    const made = composeSheet(input({ gain: 2, integral: 8 }), { ...around, asFound: null })
    expect(made).toMatchObject({ status: 'ok', sheet: { benefit: { expectedIaeRatio: null } } })
  })
  it('says repair first when the valve sticks', () => {
    const f = deskFigures(model, ok(idealOf(asFound)), 60, null)
    const list = cautionsOf({ model, present: null, proposed: ok(idealOf(asFound)), verdict: 'huntingValve', origin: 'data', noise: null, figures: f })
    expect(list[0]).toMatchObject({ code: 'repairFirst', level: 'stop' })
    expect(list[0]!.sentence).toMatch(/Retuning will not cure this: repair first/)
  })
  it('asks for a reason, a condition for stopping and a way back', () => {
    for (const missing of [{ reasons: '' }, { stopCriteria: [] }, { wayBack: '' }]) expect(makeSheetSchema.safeParse({ ...input({}), ...missing }).success).toBe(false)
  })
})

describe('words', () => {
  it('names the numbers as the form means them', () => {
    expect(settingNames({ form: 'parallel', gainUnit: 'gain', timeUnit: 's' }).integral).toBe('Integral gain, 1/s')
    expect(settingNames({ form: 'ideal', gainUnit: 'proportionalBand', timeUnit: 'repeatsPerMin' })).toEqual({ gain: 'Proportional band, %', integral: 'Integral, repeats/min', derivative: 'Derivative time, min' })
    expect(settingsText({ form: 'series', action: 'direct', gain: 250, gainUnit: 'proportionalBand', integral: null, derivative: null, timeUnit: 'min' })).toBe('series form, direct action, proportional band 250 %, integral action off, no derivative action')
  })
  it('has no controller for an on-off loop or an unknown gain', () => {
    const stored = { form: 'onOff', action: 'reverse', gain: 1, gainUnit: 'gain', integralTime: null, derivativeTime: null, timeUnit: 's', filterTimeS: null, setpointWeight: null } as const
    expect(storedController(stored)).toBeNull()
    expect(storedController({ ...stored, form: 'ideal', gain: null })).toBeNull()
  })
})

describe('expectation of a ticket', () => {
  it('is that of the newest sheet of each loop', () => {
    const sheet = (tag: string, sheetId: number, expectedIaeRatio: number | null) => ({ kind: 'changeSheet', data: { tag, sheetId, expectedIaeRatio } })
    expect(expectedOf([sheet('A', 1, 0.5), { kind: 'comment', data: {} }, sheet('B', 2, null), sheet('A', 3, 0.4)])).toEqual([{ tag: 'A', sheetId: 3, ratio: 0.4 }, { tag: 'B', sheetId: 2, ratio: null }])
    expect(expectedOf([])).toEqual([])
  })
})
