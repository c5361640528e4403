import type { LoopType } from '../types'
import { seededRandom } from '../statistics/seededRandom'
import { drawScenario } from './drawScenario'
import { errorDeviation } from './errorDeviation'
import { mixSeed } from './mixSeed'
import { CAUSES, type Cause } from './scenario'
import type { PlantLoop } from './simulatePlant'

export interface PlantWishes {
  loops: number
  days: number
  intervalS: number
  seed: number
  startMs: number
  /** `plant`: about two thirds healthy; `balanced`: every cause equally often */
  mix: 'plant' | 'balanced'
}

const TYPES: [LoopType, number][] = [['flow', 0.3], ['temperature', 0.28], ['pressure', 0.18], ['level', 0.17], ['analysis', 0.07]]
const SHARES: Record<Cause, number> = {
  healthy: 0.66, tightTuning: 0.06, stickingValve: 0.06, carriedIn: 0.05, sluggish: 0.05, saturated: 0.03, leftInManual: 0.03,
  sensorFrozen: 0.01, sensorNoisy: 0.005, sensorSpiky: 0.005, sensorOutOfRange: 0.005, noiseDominated: 0.02, tooSlow: 0.005, compressed: 0.01,
}
const AREA_SIZE = 30

/**
 * A plant of any size drawn from a seed: areas of 30 loops, some loops in cascade, some hunting because a sticking valve
 * upstream in their area does, one area in six shut down for a few hours.
 *
 * @returns as many loops as wished, with unique tags
 * @throws RangeError on fewer than one loop
 * Source: shares are our own choice; invented data.
 */
export function planPlant({ loops, days, intervalS, seed, startMs, mix }: PlantWishes): PlantLoop[] {
  if (!(loops >= 1)) throw new RangeError(`a plant needs at least one loop, got ${loops}`)
  const random = seededRandom(mixSeed(seed, 7))
  const plan: PlantLoop[] = []
  const draw = (cause: Cause, type: LoopType, periodS?: number) =>
    drawScenario(cause, type, mixSeed(seed, plan.length), { days, intervalS, startMs, periodS })
  /** A short record cannot show every cause on every type: then a quicker type, at last a healthy loop. */
  const drawWhatShows = (cause: Cause, type: LoopType) => {
    for (const other of [type, 'pressure', 'flow'] as LoopType[]) {
      try { return draw(cause, other) }
      catch (error) { if (!(error instanceof RangeError)) throw error }
    }
    return draw('healthy', type)
  }
  const add = (drawn: ReturnType<typeof draw>, description = `${drawn.setup.type}, simulated`): PlantLoop => {
    const area = Math.floor(plan.length / AREA_SIZE) + 1
    const letters = drawn.setup.tag.split('-')[0]
    drawn.setup.tag = `${letters}-${area}${String(plan.length % AREA_SIZE + 1).padStart(2, '0')}`
    const loop: PlantLoop = { setup: drawn.setup, scenario: drawn.scenario, area: `Area ${area}`, description, primary: null, carriedFrom: [] }
    plan.push(loop)
    return loop
  }
  let source: { index: number, deviation: number, periodS: number, reached: number } | null = null
  while (plan.length < loops) {
    const index = plan.length
    if (index % AREA_SIZE === 0) source = null
    const cause = mix === 'balanced' ? CAUSES[index % CAUSES.length] : pick(random.uniform(), CAUSES.map(c => [c, SHARES[c]]))
    const type = mix === 'balanced' ? TYPES[Math.floor(index / CAUSES.length) % TYPES.length][0] : pick(random.uniform(), TYPES)
    if (mix === 'plant' && cause === 'healthy' && (type === 'temperature' || type === 'level') && index + 1 < loops && random.uniform() < 0.25) {
      const outer = add(draw('healthy', type), `${type} over flow, simulated`)
      const inner = add(draw('healthy', 'flow'), 'flow under cascade, simulated')
      outer.scenario.valve = { kind: 'sound' }
      outer.scenario.stepS = intervalS
      inner.primary = index
      inner.scenario.cascade = true
      inner.scenario.workingPoint = { ...inner.scenario.workingPoint, pv: inner.setup.pvLow + (inner.setup.pvHigh - inner.setup.pvLow) * outer.scenario.workingPoint.op / 100 }
      inner.setup.normalModes = ['CAS']
      continue
    }
    if (mix === 'plant' && cause === 'carriedIn' && source !== null && source.reached < 4) {
      try {
        const drawn = draw('carriedIn', type, source.periodS)
        const part = drawn.scenario.loads.find(l => l.kind === 'periodic')
        if (part?.kind === 'periodic') {
          drawn.scenario.loads = drawn.scenario.loads.filter(l => l !== part)
          drawn.scenario.truth.spans = [{ fromS: 0, toS: drawn.scenario.durationS }]
          drawn.scenario.truth.facts = { periodS: source.periodS, source: plan[source.index].setup.tag }
          const loop = add(drawn)
          loop.setup.upstream = [plan[source.index].setup.tag]
          loop.carriedFrom = [{ source: source.index, gain: part.amplitude / (Math.SQRT2 * source.deviation), lagS: 0, delayS: source.periodS * (0.05 + 0.3 * random.uniform()) }]
          source.reached++
          continue
        }
      }
      catch (error) {
        // a period that this type of loop would not show: it gets an upset of its own
        if (!(error instanceof RangeError)) throw error
      }
    }
    const loop = add(drawWhatShows(cause, type))
    if (loop.scenario.truth.cause === 'stickingValve') {
      source = { index, deviation: errorDeviation(loop.setup, loop.scenario), periodS: Number(loop.scenario.truth.facts.periodS), reached: 0 }
    }
  }
  if (mix === 'plant' && days >= 2) {
    const areas = Math.ceil(loops / AREA_SIZE)
    for (let area = 1; area <= areas; area++) {
      if (random.uniform() > 1 / 6) continue
      const from = 3600 * Math.round((days * 24 - 14) * random.uniform())
      const to = from + 3600 * (4 + random.integer(9))
      for (const loop of plan.filter(l => l.area === `Area ${area}`)) loop.scenario.events.push({ at: from, kind: 'shutDown' }, { at: to, kind: 'startUp' })
    }
  }
  return plan
}

function pick<T>(x: number, shares: [T, number][]): T {
  const total = shares.reduce((sum, [, share]) => sum + share, 0)
  let left = x * total
  for (const [item, share] of shares) {
    left -= share
    if (left < 0) return item
  }
  return shares[shares.length - 1][0]
}
