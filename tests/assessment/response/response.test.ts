import { describe, expect, it } from 'vitest'
import { areaIndex } from '../../../shared/assessment/response/areaIndex'
import { idleIndex } from '../../../shared/assessment/response/idleIndex'
import { loadStepRecoveries } from '../../../shared/assessment/response/loadStepRecoveries'
import { findSetpointResponses } from '../../../shared/assessment/response/setpointResponses'
import { untilSettled } from '../../../shared/assessment/response/untilSettled'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { isInsufficient } from '../../../shared/assessment/types'
import { referenceCase, referenceSignal } from '../valve/referenceSignals'

const told = <T>(result: T | { status: 'insufficient', reason: string }): T => {
  if (isInsufficient(result)) throw new Error(result.reason)
  return result as T
}
const records = ['sluggish', 'simc', 'aggressive'] as const

describe('idle index (Hägglund 1999) and area index (Visioli 2005) as NumPy and R (fixtures/reference/scripts/idle.py)', () => {
  for (const name of records) {
    it(name, () => {
      const { op, pv } = referenceSignal(`idle_${name}`)
      const { expected } = referenceCase('idle', `loadstep_${name}`)
      expect(told(idleIndex(op!, pv!)).index).toBeCloseTo(expected.idle.I, 9)
      expect(told(idleIndex(op!, pv!)).together * 0.1).toBeCloseTo(expected.idle.t_pos, 6)
      const [key, cut] = Object.entries<{ I: number }>(expected.idle_windowed).find(([k]) => k.startsWith('until_pv'))!
      const end = untilSettled(pv!)
      expect(end).toBe(Number(/k=(\d+)/.exec(key)![1]))
      expect(told(idleIndex(op!.subarray(0, end + 1), pv!.subarray(0, end + 1))).index).toBeCloseTo(cut.I, 9)
      const area = told(areaIndex(op!, { sampleIntervalS: 0.1 }))
      expect(area.index).toBeCloseTo(expected.area.AI_visioli, 9)
      expect(area.areas.length).toBe(expected.area.n)
      area.areas.forEach((a, i) => expect(a).toBeCloseTo(expected.area.areas[i], 9))
    })
  }
  for (const name of ['same_direction', 'opposite', 'sin_cos']) {
    it(name, () => {
      const { op, pv } = referenceSignal(`idle_${name}`)
      expect(told(idleIndex(op!, pv!)).index).toBeCloseTo(referenceCase('idle', name).expected.I, 12)
    })
  }
  it('cut at 5 %, the order of sluggish, well tuned and too quick is right; a negative process gain turns the sign', () => {
    const [slow, good, quick] = records.map((name) => {
      const { op, pv } = referenceSignal(`idle_${name}`)
      const end = untilSettled(pv!)
      return told(idleIndex(op!.subarray(0, end), pv!.subarray(0, end))).index
    }) as [number, number, number]
    expect(slow).toBeGreaterThan(0.5)
    expect(Math.abs(good)).toBeLessThan(0.3)
    expect(quick).toBeLessThan(-0.5)
    const { op, pv } = referenceSignal('idle_simc')
    expect(told(idleIndex(op!, pv!.map(v => -v), -1)).index).toBeCloseTo(told(idleIndex(op!, pv!)).index, 12)
  })
})

/** Step response of K / (s^2 / w^2 + 2 z s / w + 1), closed form. */
const second = (t: number, damping: number, w: number) => {
  if (t < 0) return 0
  const root = Math.sqrt(1 - damping * damping)
  return 1 - Math.exp(-damping * w * t) * (Math.cos(w * root * t) + damping / root * Math.sin(w * root * t))
}

describe('set-point responses, closed forms of a second-order loop (textbook)', () => {
  const respond = (damping: number, noise = 0, from = 20, to = 30) => {
    const random = seededRandom(1)
    const sp = Float64Array.from({ length: 4000 }, (_, k) => (k < 1000 ? from : to))
    const pv = sp.map((_, k) => from + (to - from) * second(k - 1000, damping, 0.05) + noise * random.normal())
    return findSetpointResponses(sp, pv, { sampleIntervalS: 1, settlingS: 400, noiseLevel: noise, t0Ms: 5000 })
  }
  for (const damping of [0.2, 0.4, 0.6]) {
    it(`damping ${damping}: overshoot exp(-pi z / sqrt(1 - z^2)), decay ratio its square, settling`, () => {
      const [response, ...more] = respond(damping)
      const overshoot = Math.exp(-Math.PI * damping / Math.sqrt(1 - damping * damping))
      expect(more).toEqual([])
      expect(response!.atMs).toBe(1_005_000)
      expect([response!.from, response!.to, response!.settled]).toEqual([20, 30, true])
      expect(response!.overshootFraction).toBeCloseTo(overshoot, 1.5)
      if (damping < 0.5) expect(response!.decayRatio).toBeCloseTo(overshoot ** 2, 1.5)
      // last time outside of 2 %, on a fine grid of the closed form
      let last = 0
      for (let t = 0; t < 2000; t += 0.1) if (Math.abs(second(t, damping, 0.05) - 1) > 0.02) last = t
      expect(Math.abs(response!.settlingTimeS! - last)).toBeLessThan(12)
    })
  }
  it('first order: rise 2.197 time constants, no overshoot, error integral step x time constant', () => {
    const sp = Float64Array.from({ length: 4000 }, (_, k) => (k < 1000 ? 0 : -5))
    const pv = sp.map((_, k) => (k < 1000 ? 0 : -5 * (1 - Math.exp(-(k - 1000) / 100))))
    const [response] = findSetpointResponses(sp, pv, { sampleIntervalS: 1, settlingS: 400, noiseLevel: 0 })
    expect(Math.abs(response!.riseTimeS! / (100 * Math.log(9)) - 1)).toBeLessThan(0.02)
    expect(response!.overshootFraction).toBe(0)
    expect(response!.decayRatio).toBeNull()
    expect(Math.abs(response!.iae! / 500 - 1)).toBeLessThan(0.01)
    expect(Math.abs(response!.settlingTimeS! / (100 * Math.log(50)) - 1)).toBeLessThan(0.05)
  })
  it('with noise the overshoot stays within 3 % of the step', () => {
    expect(Math.abs(respond(0.4, 0.2)[0]!.overshootFraction! - 0.254)).toBeLessThan(0.03)
  })
  it('mirror and shift: the same fractions', () => {
    const { atMs: _a, from: _f, to: _t, iae: _i, ...up } = respond(0.4)[0]!
    const down = respond(0.4, 0, 80, 60)[0]!
    expect(down.overshootFraction).toBeCloseTo(up.overshootFraction!, 9)
    expect(down.settlingTimeS).toBe(up.settlingTimeS)
  })
  it('one that never arrives counts as failed; small, restless and unfinished moves do not count', () => {
    const options = { sampleIntervalS: 1, settlingS: 100, noiseLevel: 0.1 }
    const sp = Float64Array.from({ length: 1000 }, (_, k) => (k < 300 ? 0 : 10))
    const [failed] = findSetpointResponses(sp, new Float64Array(1000), options)
    expect(failed).toMatchObject({ settled: false, settlingTimeS: null, riseTimeS: null })
    expect(findSetpointResponses(sp.map(v => v * 0.02), new Float64Array(1000), options)).toEqual([])
    expect(findSetpointResponses(Float64Array.from({ length: 1000 }, (_, k) => Math.sin(k / 10)), new Float64Array(1000), options)).toEqual([])
    expect(findSetpointResponses(sp.subarray(0, 350), new Float64Array(350), options)).toEqual([])
    expect(findSetpointResponses(new Float64Array(0), new Float64Array(0), options)).toEqual([])
  })
  it('misuse', () => {
    expect(() => findSetpointResponses(new Float64Array(2), new Float64Array(3), { sampleIntervalS: 1, settlingS: 1, noiseLevel: 0 })).toThrow(/one length/)
    expect(() => findSetpointResponses(new Float64Array(2), new Float64Array(2), { sampleIntervalS: 0, settlingS: 1, noiseLevel: 0 })).toThrow(/sampleIntervalS/)
  })
})

describe('recoveries after load steps', () => {
  const error = Float64Array.from({ length: 3000 }, (_, k) => (k < 500 ? 0 : 8 * Math.exp(-(k - 500) / 200)))
  it('closed form: an exponential is down to a tenth after 2.303 time constants; slow against 100 s, not against 1000 s', () => {
    const [slow, ...more] = loadStepRecoveries(error, { sampleIntervalS: 1, settlingS: 100, band: 0.3 })
    expect(more).toEqual([])
    expect(slow).toMatchObject({ from: 500, peakAt: 500, peak: 8, swingBack: 0, slow: true })
    expect(Math.abs(slow!.recoveryS! / (200 * Math.log(10)) - 1)).toBeLessThan(0.01)
    expect(loadStepRecoveries(error, { sampleIntervalS: 1, settlingS: 1000, band: 0.3 })[0]!.slow).toBe(false)
    expect(loadStepRecoveries(error.map(v => -v), { sampleIntervalS: 1, settlingS: 100, band: 0.3 })[0]!.slow).toBe(true)
  })
  it('one that swings back is not slow', () => {
    const swinging = error.map((v, k) => v * Math.cos((k - 500) / 60))
    expect(loadStepRecoveries(swinging, { sampleIntervalS: 1, settlingS: 10, band: 0.3 })[0]!.slow).toBe(false)
  })
  it('an unfinished one has no time; nothing in quiet or missing data; refuses a band of 0', () => {
    expect(loadStepRecoveries(error.subarray(0, 700), { sampleIntervalS: 1, settlingS: 100, band: 0.3 })[0]!.recoveryS).toBeNull()
    expect(loadStepRecoveries(new Float64Array(100).fill(Number.NaN), { sampleIntervalS: 1, settlingS: 100, band: 0.3 })).toEqual([])
    expect(() => loadStepRecoveries(error, { sampleIntervalS: 1, settlingS: 100, band: 0 })).toThrow(/band/)
  })
})

describe('misuse and inputs left alone', () => {
  it('refuses', () => {
    expect(() => idleIndex(new Float64Array(2), new Float64Array(3))).toThrow(/one length/)
    expect(() => areaIndex(new Float64Array(2), { sampleIntervalS: 0 })).toThrow(/sampleIntervalS/)
    expect(() => untilSettled(new Float64Array(2), 2)).toThrow(/fraction/)
    expect(isInsufficient(idleIndex(new Float64Array(5), new Float64Array(5)))).toBe(true)
    expect(isInsufficient(areaIndex(new Float64Array(5), { sampleIntervalS: 1 }))).toBe(true)
    expect(untilSettled(new Float64Array(5))).toBe(0)
  })
  it('leaves inputs alone', () => {
    const { op, pv } = referenceSignal('idle_simc')
    const before = [op!.slice(), pv!.slice()]
    idleIndex(op!, pv!); areaIndex(op!, { sampleIntervalS: 0.1 }); untilSettled(pv!)
    findSetpointResponses(op!, pv!, { sampleIntervalS: 0.1, settlingS: 20, noiseLevel: 0 })
    expect([op, pv]).toEqual(before)
  })
})
