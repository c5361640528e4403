import { describe, expect, it } from 'vitest'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { isInsufficient } from '../../../shared/assessment/types'
import { apparentStiction } from '../../../shared/assessment/valve/apparentStiction'
import { averageDown } from '../../../shared/assessment/valve/averageDown'
import { cycles } from '../../../shared/assessment/valve/cycles'
import { deadBandSlipJump } from '../../../shared/assessment/valve/deadBandSlipJump'
import { createDeadBand } from '../../../shared/assessment/valve/models/deadBand'
import { createKanoStiction } from '../../../shared/assessment/valve/models/kanoStiction'
import { outputTurns } from '../../../shared/assessment/valve/outputTurns'
import { stickAndJump } from '../../../shared/assessment/valve/stickAndJump'

const told = <T>(result: T | { status: 'insufficient', reason: string }): T => {
  if (isInsufficient(result)) throw new Error(result.reason)
  return result as T
}
const signal = (length: number, make: (k: number, normal: () => number) => number, seed = 1) => {
  const random = seededRandom(seed)
  return Float64Array.from({ length }, (_, k) => make(k, random.normal))
}
const sine = (k: number, period: number, phase = 0) => Math.sin(2 * Math.PI * k / period + phase)
const triangle = (k: number, period: number) => 2 / Math.PI * Math.asin(sine(k, period))
/** White noise through a resonance of known damping. */
function resonance(damping: number, period: number, seed: number, length = 20_000) {
  const w = 2 * Math.PI / period, r = Math.exp(-damping * w), c = 2 * r * Math.cos(w * Math.sqrt(1 - damping * damping))
  let one = 0, two = 0
  return signal(length, (_k, normal) => { const next = c * one - r * r * two + normal(); two = one; one = next; return next }, seed)
}
const flat = new Float64Array(2000)

describe('loop of process variable over output', () => {
  const op = signal(6000, k => 50 + 8 * sine(k, 120))
  it('dead band: the width is the dead band (closed form)', () => {
    const play = createDeadBand({ width: 3, initial: 50 })
    const pv = op.map(u => play(u))
    const { percent, low, high } = told(apparentStiction(op, pv.map((v, k) => 20 + 0.7 * v + 0.05 * sine(k, 7.3)), { periodSamples: 120, opSpan: 100 }))
    expect(percent).toBeCloseTo(3, 1)
    expect(low).toBeLessThanOrEqual(percent)
    expect(high).toBeGreaterThanOrEqual(percent)
    expect(told(apparentStiction(op, pv, { periodSamples: 120, opSpan: 50 })).percent).toBeCloseTo(6, 1)
  })
  it('a valve that follows has no width', () => {
    expect(told(apparentStiction(op, op, { periodSamples: 120, opSpan: 100 })).percent).toBeLessThan(0.01)
  })
  it('stem that only jumps: standing, jumps, stick band S (closed form); dead band has no jump', () => {
    const ramp = signal(6000, k => 50 + 2.3 * triangle(k, 120))
    const valve = createKanoStiction({ stickBand: 4, slipJump: 4, initial: 47.7 })
    const stem = ramp.map(u => valve(u))
    const pattern = told(stickAndJump(ramp, stem))
    expect(pattern.says).toBe('sticking')
    expect(pattern.standingTravel).toBeGreaterThan(0.8)
    const sized = told(deadBandSlipJump(ramp, stem, 1))
    expect(sized.stickBand).toBeCloseTo(4, 0)
    expect(sized.jumpShare).toBeGreaterThan(0.8)
    expect(sized.slipJump).toBeCloseTo(4, 0)
    const play = createDeadBand({ width: 3, initial: 50 })
    expect(told(deadBandSlipJump(op, op.map(u => play(u)), 1)).jumpShare).toBeLessThan(0.4)
  })
  it('sines and noise are no stick-and-jump: shares 0.25 and 0.31 by integration', () => {
    const pattern = told(stickAndJump(signal(6000, k => sine(k, 120)), signal(6000, k => sine(k, 120, Math.PI / 2))))
    expect(pattern.standingTravel).toBeCloseTo(0.25, 1)
    expect(pattern.jumpShare).toBeCloseTo(0.31, 1)
    expect(pattern.says).toBe('undecided')
    expect(told(stickAndJump(op, signal(6000, (_k, normal) => normal()))).says).toBe('undecided')
  })
})

describe('degenerate, misuse, inputs left alone', () => {
  it('cannot tell on signals that stand still or are too short', () => {
    for (const x of [flat, flat.subarray(0, 50)]) {
      for (const result of [apparentStiction(x, x, { periodSamples: 40, opSpan: 100 }), stickAndJump(x, x), deadBandSlipJump(x, x)]) expect(isInsufficient(result)).toBe(true)
    }
    expect(cycles(new Float64Array(10), 40)).toEqual([])
    expect(outputTurns(flat)).toHaveLength(0)
  })
  it('refuses what cannot be meant', () => {
    expect(() => cycles(flat, 3)).toThrow(/periodSamples/)
    expect(() => apparentStiction(flat, flat.subarray(1), { periodSamples: 40, opSpan: 100 })).toThrow(/one length/)
    expect(() => apparentStiction(flat, flat, { periodSamples: 40, opSpan: 0 })).toThrow(/opSpan/)
    expect(() => stickAndJump(flat, flat.subarray(1))).toThrow(/one length/)
    expect(() => deadBandSlipJump(flat, flat, 0)).toThrow(/processGain/)
    expect(() => averageDown(flat, 0)).toThrow(/factor/)
  })
  it('turns alternate and lie at the extremes', () => {
    expect([...outputTurns(signal(100, k => triangle(k, 20)))]).toEqual([5, 15, 25, 35, 45, 55, 65, 75, 85, 95].slice(0, outputTurns(signal(100, k => triangle(k, 20))).length))
  })
  it('leaves inputs alone', () => {
    const x = resonance(0.1, 40, 1, 2000), before = x.slice()
    stickAndJump(x, x); deadBandSlipJump(x, x); apparentStiction(x, x, { periodSamples: 40, opSpan: 1 })
    expect(x).toEqual(before)
  })
})
