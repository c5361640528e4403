import { describe, expect, it } from 'vitest'
import { runCase } from '../../../scripts/simulatedCases'
import { drawShortWindow, WINDOW_CONDITIONS, WINDOW_TYPES, type WindowCondition } from '../../../shared/assessment/simulation/drawShortWindow'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { createHeStiction } from '../../../shared/assessment/valve/models/heStiction'
import { createKanoStiction } from '../../../shared/assessment/valve/models/kanoStiction'
import { EVIDENCE_TEXTS } from '../../../shared/assessment/verdict/evidenceTexts'
import { FEATURES, SHORT_FEATURES, type FeatureValues } from '../../../shared/assessment/verdict/gatherFeatures'
import { posteriorOf, type LikelihoodTable } from '../../../shared/assessment/verdict/likelihoods'
import { SLIP_TABLE, type SlipTable } from '../../../shared/assessment/verdict/slipTable'
import { standsAndJumps, type StandOptions } from '../../../shared/assessment/verdict/standsAndJumps'
import { stickRuns } from '../../../shared/assessment/verdict/stickRuns'

const options: StandOptions = { sign: 1, noise: 0.05, quantum: 0, pvSpan: 100, opSpan: 100, width: 2, bends: false }
const noisy = (x: Float64Array, deviation: number, seed: number) => { const random = seededRandom(seed); return x.map(v => v + deviation * random.normal()) }
const constant = (n: number, value: number) => new Float64Array(n).fill(value)

describe('standsAndJumps', () => {
  // He, Wang, Pottmann, Qin 2007: behind a ramp the stem climbs stairs of J = fs - fd, each after a rest in which the command moves on by J
  const ramp = Float64Array.from({ length: 700 }, (_, i) => 30 + i * 0.05)
  const he = createHeStiction({ stickBand: 6, slipJump: 4, initial: 30 })
  const stairs = noisy(ramp.map(he), 0.05, 4)
  const above = constant(700, 75)

  it('counts the stairs of the published model, each after as much travel as it is high', () => {
    // first step after fs = 5, then one for each 4: travel 35 makes 1 + floor(30 / 4) = 8
    const found = standsAndJumps(stairs, ramp, above, options)
    expect([found.looked, found.slips]).toEqual([8, 8])
    // the samples next to the jumps are left out of the travel: 7 of 80
    expect(found.travel).toBeGreaterThan(0.85)
    expect(found.travel).toBeLessThan(1)
    expect(Math.abs(found.follow)).toBeLessThan(0.05)
    expect(Math.abs(found.standGain)).toBeLessThan(0.05)
  })

  it('counts the jumps after each turn of a triangle, by the model of Kano and others 2004', () => {
    // S = 6, J = 4 on a triangle of +-6, six flanks: after each turn the stem stands while the command travels 6, jumps by 4, then follows
    const triangle = Float64Array.from({ length: 720 }, (_, i) => { const p = i % 240; return 50 + (p < 120 ? -6 + p * 0.1 : 6 - (p - 120) * 0.1) })
    const pv = noisy(triangle.map(createKanoStiction({ stickBand: 6, slipJump: 4, initial: 50 })), 0.05, 5)
    const found = standsAndJumps(pv, triangle, null, options)
    expect([found.looked, found.slips]).toEqual([6, 6])
    // S / J = 1.5, less the samples next to turn and jump
    expect(found.travel).toBeGreaterThan(1.2)
    expect(found.travel).toBeLessThan(1.5)
    expect(Math.abs(found.standGain)).toBeLessThan(0.05)
  })

  it('counts none behind a sound valve: neither where PV follows, nor where a load throws it off', () => {
    expect(standsAndJumps(noisy(ramp, 0.05, 4), ramp, above, options).slips).toBe(0)
    // load steps from rest, each worked off by integral action: away from the set point, and against what the output did
    let e = 0
    let u = 50
    const op = new Float64Array(700)
    const pv = Float64Array.from({ length: 700 }, (_, i) => { const load = i % 200 < 100 ? 0 : 5; e = 50 - (u - 50 + 50 + load); u += 0.1 * e; op[i] = u; return 50 - e })
    const found = standsAndJumps(noisy(pv, 0.05, 6), op, constant(700, 50), options)
    expect(found.looked).toBeGreaterThan(3)
    expect(found.slips).toBe(0)
  })

  it('lays no jump to the valve that the set point made, nor one that the output made', () => {
    expect(standsAndJumps(stairs, ramp, stairs.map(v => v + 1), options).looked).toBe(0)
    expect(standsAndJumps(stairs, stairs, above, options).slips).toBe(0)
  })

  it('says the same of a reversed process, other units and another working point', () => {
    const found = standsAndJumps(stairs, ramp, above, options)
    const same = (f: typeof found) => { expect([f.looked, f.slips]).toEqual([found.looked, found.slips]); expect(f.travel).toBeCloseTo(found.travel, 6); expect(f.offset).toBeCloseTo(found.offset, 6) }
    same(standsAndJumps(stairs.map(v => -v), ramp, above.map(v => -v), { ...options, sign: -1 }))
    same(standsAndJumps(stairs.map(v => 40 + 8 * v), ramp.map(v => 2.55 * v), above.map(v => 40 + 8 * v), { ...options, noise: 0.4, pvSpan: 800, opSpan: 255 }))
    expect(standsAndJumps(stairs, ramp, above, { ...options, sign: -1 }).slips).toBe(0)
  })

  it('sees the bends of an integrating process', () => {
    // a tank: outflow constant, inflow a stem that stands at 45, then at 55; the output ramps the way that asks for each slip
    const stem = (i: number) => (Math.floor(i / 150) % 2 ? 55 : 45)
    let level = 50
    const pv = noisy(Float64Array.from({ length: 750 }, (_, i) => (level += 0.02 * (stem(i) - 50))), 0.05, 7)
    const op = Float64Array.from({ length: 750 }, (_, i) => { const p = i % 300; return 50 + (p < 150 ? -6 + p * 0.08 : 6 - (p - 150) * 0.08) })
    const found = standsAndJumps(pv, op, constant(750, 42.5), { ...options, width: 4, bends: true })
    expect(found.looked).toBe(4)
    expect(standsAndJumps(pv, op, null, { ...options, width: 4, bends: true }).slips).toBe(4)
  })

  it('is silent on standing and short records, refuses misfits, and leaves its arguments alone', () => {
    const none = { looked: 0, slips: 0, travel: NaN, follow: NaN, standGain: NaN, offset: NaN, size: NaN }
    expect(standsAndJumps(constant(700, 50), ramp, above, options)).toEqual(none)
    expect(standsAndJumps(stairs.subarray(0, 20), ramp.subarray(0, 20), null, options)).toEqual(none)
    expect(standsAndJumps(new Float64Array(0), new Float64Array(0), null, options)).toEqual(none)
    expect(() => standsAndJumps(stairs, ramp.subarray(1), null, options)).toThrow(/one length/)
    expect(() => standsAndJumps(stairs, ramp, above.subarray(1), options)).toThrow(/one length/)
    expect(() => standsAndJumps(stairs, ramp, above, { ...options, width: 0 })).toThrow(RangeError)
    const before = [stairs.slice(), ramp.slice(), above.slice()]
    standsAndJumps(stairs, ramp, above, { ...options, bends: true })
    expect([stairs, ramp, above]).toEqual(before)
  })
})

describe('stickRuns', () => {
  const random = seededRandom(21)
  let w = 0
  const op = Float64Array.from({ length: 400 }, (_, i) => { w = 0.98 * w + 0.25 * random.normal(); return 50 + 6 * Math.sin(2 * Math.PI * i / 150) + w })
  const tank = (stem: Float64Array, gain = 0.02) => { let level = 50; return noisy(stem.map(s => (level += gain * (s - 50))), 0.1, 22) }
  it('explains a level behind the stem of He and others 2007 much better than the output does', () => {
    const r = stickRuns(tank(op.map(createHeStiction({ stickBand: 8, slipJump: 5, initial: 50 }))), op, 1)!
    expect(r.explained).toBeGreaterThan(0.9)
    expect(r.gain).toBeGreaterThan(1)
  })
  it('gains nothing behind a sound valve, which explains the level whole', () => {
    const r = stickRuns(tank(op), op, 1)!
    expect(r.explained).toBeGreaterThan(0.97)
    expect(r.gain).toBeLessThan(0.05)
  })
  it('explains nothing with the wrong sign, and does not speak of standing or short signals', () => {
    const falling = tank(op, -0.02)
    expect(stickRuns(falling, op, 1)!.explained).toBeLessThan(0.5)
    expect(stickRuns(falling, op, -1)!.explained).toBeGreaterThan(0.97)
    expect(stickRuns(constant(400, 50), op, 1)).toBeNull()
    expect(stickRuns(op, constant(400, 50), 1)).toBeNull()
    expect(stickRuns(op.subarray(0, 59), op.subarray(0, 59), 1)).toBeNull()
    expect(() => stickRuns(op, op.subarray(1), 1)).toThrow(/one length/)
  })
})

const nothing = () => Object.fromEntries([...FEATURES, ...SHORT_FEATURES].map(f => [f, NaN])) as FeatureValues

describe('second table', () => {
  const first: LikelihoodTable = {
    training: { command: 'by hand', firstSeed: 0, loops: 0, heldOut: 0 }, classes: ['steady', 'huntingValve', 'noise'], base: [0, 0, 0], temperature: 1,
    features: [{ name: 'kurtosis', edges: [2], weights: [[0, 2, 0], [0, 0, 0], [0, 0, 0]], counts: [[0, 0, 0], [0, 0, 0], [0, 0, 0]] }],
  }
  const second: SlipTable = {
    training: { command: 'by hand', firstSeed: 0, windows: 0, heldOut: 0 }, withoutRhythm: { base: 0.4, scale: 0.5 }, withRhythm: { base: -1, scale: 1 },
    features: [{ name: 'jumpSlips', edges: [1.5], weights: [-1, 3, 0], counts: [[0, 0], [0, 0], [0, 0]] }],
  }
  const floored = (p: number) => 0.015 + p * (0.97 - 0.015)
  it('adds its weights to the scaled logit of the first, by whether there is a rhythm; the others keep their proportions', () => {
    // closed form: the first table gives odds 1 : 2, so logit p = 0.4 + 0.5 ln (1/2) + 3
    const p = posteriorOf({ ...nothing(), jumpSlips: 2 }, first, second).probability
    expect(p[1]).toBeCloseTo(floored(1 / (1 + Math.exp(-(0.4 + 0.5 * Math.log(0.5) + 3)))), 12)
    expect(p[0]).toBeCloseTo(p[2], 12)
    expect(p[0] + p[1] + p[2]).toBeCloseTo(1, 12)
    const rhythm = posteriorOf({ ...nothing(), jumpSlips: 0, regularity: 1, kurtosis: 1 }, first, second).probability
    expect(rhythm[1]).toBeCloseTo(floored(1 / (1 + Math.exp(-(-1 + 2 + Math.log(0.5) - 1)))), 12)
  })
  it('is silent where no strokes were looked for', () => {
    expect(posteriorOf(nothing(), first, second).probability).toEqual(posteriorOf(nothing(), first, null).probability)
  })
  it('ships whole, with a sentence for each figure', () => {
    expect(SLIP_TABLE.features.map(f => f.name)).toEqual([...SHORT_FEATURES])
    for (const f of SLIP_TABLE.features) {
      expect([f.weights.length, f.counts.length]).toEqual([f.edges.length + 2, f.edges.length + 2])
      expect(f.counts.flat().reduce((a, b) => a + b, 0)).toBe(SLIP_TABLE.training.windows)
    }
    expect(SLIP_TABLE.training.windows).toBeGreaterThan(1000)
    for (const f of SHORT_FEATURES) for (const x of [0.4, -0.4]) expect(EVIDENCE_TEXTS[f].text(x)).toMatch(/^[A-Z0-9−].*\.$/)
  })
})

describe('drawShortWindow', () => {
  it('gives the same window again: 750 samples in automatic, with its truth', () => {
    for (const condition of WINDOW_CONDITIONS) {
      const w = drawShortWindow(condition, 'flow', 3_100_001)
      expect(drawShortWindow(condition, 'flow', 3_100_001)).toEqual(w)
      expect(w.record.t.length).toBeLessThanOrEqual(750)
      expect(new Set(w.record.mode).has(1)).toBe(false)
      const sticks = condition.startsWith('sticking')
      expect(w.truth.valve.kind === 'sticking').toBe(sticks)
      expect(w.truth.slips > 0).toBe(sticks)
      expect(w.truth.verdict === 'huntingValve').toBe(sticks)
      if (condition !== 'stickingQuick') expect(w.truth.slips).toBeLessThanOrEqual(6)
    }
  })
  it('draws all three published models', () => {
    const models = Array.from({ length: 12 }, (_, s) => drawShortWindow('stickingSlow', 'pressure', 3_100_000 + s).truth.facts.model)
    expect(new Set(models)).toEqual(new Set(['kano', 'choudhury', 'he']))
  })
})

// The truth is what the simulator built in; the seeds are neither those of the calibration nor those of the accuracy.
describe('verdicts on short windows', () => {
  const run = (window: WindowCondition) => (['flow', 'pressure'] as const).flatMap(type => Array.from({ length: window.startsWith('sticking') ? 8 : 3 }, (_, s) => s).flatMap(s => runCase({ cause: 'healthy', window, type, seed: 3_200_000 + s }) ?? []))
  const results = WINDOW_CONDITIONS.flatMap(run)
  it('name most valves that slipped twice or more', () => {
    const slipped = results.filter(r => r.truth === 'huntingValve' && r.slips! >= 2)
    expect(slipped.filter(r => r.verdict === 'huntingValve').length / slipped.length).toBeGreaterThan(0.5)
  })
  it('accuse no more than one sound valve in twenty', () => {
    const sound = results.filter(r => r.truth !== 'huntingValve')
    expect(sound.filter(r => r.verdict === 'huntingValve').length / sound.length).toBeLessThan(0.05)
  })
  it('covers every type', () => expect(WINDOW_TYPES).toContain('level'))
})
