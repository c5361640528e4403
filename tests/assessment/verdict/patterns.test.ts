import { describe, expect, it } from 'vitest'
import { analysisSeries } from '../../../shared/assessment/preparation/analysisSeries'
import { prepareRecord } from '../../../shared/assessment/preparation/prepareRecord'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { controllerSign } from '../../../shared/assessment/verdict/controllerSign'
import { fastSwing } from '../../../shared/assessment/verdict/fastSwing'
import { halfCycles } from '../../../shared/assessment/verdict/halfCycles'
import { readingCharacter } from '../../../shared/assessment/verdict/readingCharacter'
import { slipEvents } from '../../../shared/assessment/verdict/slipEvents'
import { stickFit } from '../../../shared/assessment/verdict/stickFit'
import { createHeStiction } from '../../../shared/assessment/valve/models/heStiction'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { makeRecord, makeSetup } from '../records'

const week = weekFrame('2026-W48', 'UTC')
const prepared = (n: number, pv: (i: number) => number) => prepareRecord(makeRecord({ fromMs: week.hourEdges[0], intervalS: 10, n, pv }), makeSetup(), week)

/** Output that wanders, a stem behind it, a first-order process, noise. */
function loop(stem: (u: number) => number, seed: number, lag = 3) {
  const random = seededRandom(seed)
  const n = 1200
  const u = new Float64Array(n)
  const y = new Float64Array(n)
  let w = 0
  let state = 0
  for (let i = 0; i < n; i++) {
    w = 0.97 * w + 0.3 * random.normal()
    u[i] = 50 + 3 * Math.sin(2 * Math.PI * i / 70) + w
    state += (1 - Math.exp(-1 / lag)) * (stem(u[i]) - 50 - state)
    y[i] = state + 0.1 * random.normal()
  }
  return { u, y }
}

describe('stickFit', () => {
  it('explains PV behind a sticking stem better than a sound one, and finds its band', () => {
    const { u, y } = loop(createHeStiction({ stickBand: 4, slipJump: 2, initial: 50 }), 8)
    const f = stickFit(y, u, 1, 210)!
    expect(f.explained).toBeGreaterThan(0.85)
    expect(f.explained - f.linear).toBeGreaterThan(0.05)
    expect(f.band).toBeGreaterThan(2)
    expect(f.band).toBeLessThan(6)
  })
  it('sees no gain behind a sound valve', () => {
    const { u, y } = loop(x => x, 8)
    const f = stickFit(y, u, 1, 210)!
    expect(f.linear).toBeGreaterThan(0.9)
    expect(f.explained - f.linear).toBeLessThan(0.02)
  })
  it('explains nothing of a PV that has nothing to do with OP, or moves the wrong way', () => {
    const { u, y } = loop(x => x, 8, 0.01)
    const random = seededRandom(3)
    expect(stickFit(y.map(() => random.normal()), u, 1, 210)!.explained).toBeLessThan(0.1)
    expect(stickFit(y.map(v => -v), u, 1, 210)!.linear).toBeLessThan(0.2)
  })
  it('is not there on short or standing signals', () => {
    const { u, y } = loop(x => x, 8)
    expect(stickFit(y.subarray(0, 99), u.subarray(0, 99), 1, 60)).toBeNull()
    expect(stickFit(y, new Float64Array(1200).fill(40), 1, 60)).toBeNull()
    expect(() => stickFit(y, u.subarray(1), 1, 60)).toThrow(/one length/)
  })
})

describe('controllerSign', () => {
  const random = seededRandom(12)
  const e = Float64Array.from({ length: 500 }, (_, i) => Math.sin(i / 9) + 0.1 * random.normal())
  /** u = K e + K / Ti integral e */
  const pi = (gain: number) => { let sum = 0; return e.map((x) => { sum += x; return 40 + gain * (x + sum / 20) }) }
  it('reads the action of a PI controller, whatever the set-up says', () => {
    expect(controllerSign(e, pi(0.5), -1)).toBe(1)
    expect(controllerSign(e, pi(-0.5), 1)).toBe(-1)
  })
  it('believes the set-up where the record does not tell', () => {
    expect(controllerSign(e, e.map(() => 40), -1)).toBe(-1)
    expect(controllerSign(e, e.map(() => random.normal()), 1)).toBe(1)
    expect(controllerSign(e.subarray(0, 20), pi(-1).subarray(0, 20), 1)).toBe(1)
  })
})

describe('slipEvents', () => {
  // by hand: PV stands 2 below, then 2 above the set point, 40 samples each; the output ramps the way that asks for the jump
  const square = (n: number) => Float64Array.from({ length: n }, (_, i) => Math.floor(i / 40) % 2 ? 2 : -2)
  const ramp = (n: number) => Float64Array.from({ length: n }, (_, i) => { const p = i % 80; return 40 + (p < 40 ? p : 80 - p) * 0.05 })
  it('counts jumps that the output had asked for', () => {
    const y = square(400)
    // ten half-cycles; the last has not ended
    expect(slipEvents(y, y, ramp(400), 1, 0.05)).toEqual({ looked: 9, slips: 9 })
  })
  it('counts none the other way, none in a sine, none where the set point jumped', () => {
    const y = square(400)
    expect(slipEvents(y, y, ramp(400), -1, 0.05)).toEqual({ looked: 9, slips: 0 })
    const sine = Float64Array.from({ length: 400 }, (_, i) => -2 * Math.sin(2 * Math.PI * (i + 0.5) / 80))
    expect(slipEvents(sine, sine, ramp(400), 1, 0.05).slips).toBe(0)
    expect(slipEvents(y, new Float64Array(400), ramp(400), 1, 0.05).slips).toBe(0)
  })
  it('looks at nothing within the noise', () => {
    const y = square(400)
    expect(slipEvents(y, y, ramp(400), 1, 1).looked).toBe(0)
    expect(() => slipEvents(y, y, ramp(399), 1, 1)).toThrow(/one length/)
  })
})

describe('halfCycles', () => {
  const of = (e: (i: number) => number, least = 1, n = 6000) => halfCycles(analysisSeries(prepared(n, i => 50 - e(i)), 30), least)
  it('counts a square wave of uneven lengths as one run of hunting', () => {
    // half-cycles of 20 to 36 samples, all of height 3
    const random = seededRandom(2)
    const wave: number[] = []
    for (let side = 3; wave.length < 6000; side = -side) for (let k = 20 + random.integer(17); k > 0; k--) wave.push(side)
    const h = of(i => wave[i])
    expect(h.runs).toHaveLength(1)
    expect(h.inRuns / h.count).toBeGreaterThan(0.95)
    // the mean of so uneven a wave is not quite 0, and is taken off
    expect(Math.abs(h.amplitude - 3)).toBeLessThan(0.1)
    expect(h.periodS).toBeGreaterThan(500)
    expect(h.periodS).toBeLessThan(620)
    expect(h.peakVariation).toBeLessThan(0.05)
  })
  it('finds no run in load responses of every size, and nothing below the least size', () => {
    const random = seededRandom(5)
    let e = 0
    const walk = Array.from({ length: 6000 }, () => (e = 0.99 * e + 0.2 * random.normal()))
    const h = of(i => walk[i])
    expect(h.inRuns / Math.max(1, h.count)).toBeLessThan(0.5)
    expect(of(i => Math.sin(i / 8), 1.5).count).toBe(0)
    expect(() => of(() => 0, 0)).toThrow(RangeError)
  })
})

describe('fastSwing', () => {
  it('finds a swing of 2.8 samples and gives white noise its share', () => {
    const random = seededRandom(6)
    const x = Float64Array.from({ length: 2000 }, (_, i) => Math.sin(2 * Math.PI * i / 2.8) + 0.3 * random.normal())
    const f = fastSwing(x)!
    expect(f.period).toBeCloseTo(2.8, 0)
    expect(f.share).toBeGreaterThan(0.8)
    // five of 32 bins, the largest of 19 such windows
    const white = fastSwing(Float64Array.from({ length: 4000 }, () => random.normal()))!
    expect(white.share).toBeGreaterThan(5 / 32 - 0.02)
    expect(white.share).toBeLessThan(0.3)
    expect(fastSwing(x.subarray(0, 100))).toBeNull()
  })
})

describe('readingCharacter', () => {
  it('reads the size of white noise within 5 %, and calls steady noise no burst', () => {
    const random = seededRandom(9)
    const r = readingCharacter(prepared(20_000, () => 50 + 0.8 * random.normal()), 100, 0)
    expect(r.noise / 0.8).toBeCloseTo(1, 1)
    expect(r.burstShare).toBe(0)
    expect(r.wildShare).toBe(0)
  })
  it('sees bursts and single wild readings', () => {
    const random = seededRandom(10)
    const burst = readingCharacter(prepared(20_000, i => 50 + (i > 8000 && i < 12_000 ? 5 : 0.2) * random.normal()), 100, 0)
    expect(burst.burstRatio).toBeGreaterThan(10)
    expect(burst.burstShare).toBeGreaterThan(0.1)
    const wild = readingCharacter(prepared(20_000, i => 50 + 0.2 * random.normal() + (i % 100 === 50 ? 30 : 0)), 100, 0)
    expect(wild.wildShare).toBeCloseTo(0.01, 4)
  })
})
