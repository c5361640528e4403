import { margins } from '../../control/margins/margins'
import type { SeededRandom } from '../statistics/seededRandom'
import type { DrawnLoop, GivenRange } from './drawLoop'
import { idealTuning } from './idealTuning'
import { simulateLoop } from './simulateLoop'
import type { LoadPart, LoopScenario, SetpointProgramme, Span } from './scenario'

export interface DrawOptions {
  days: number
  /** undefined: one usual for the loop's type (a multiple of the period for `tooSlow`) */
  intervalS?: number
  startMs?: number
  /** false: the cause acts all the time; else in a third of the draws only in a part of it */
  partial?: boolean
  /** for `carriedIn`: the period that arrives; undefined: drawn */
  periodS?: number
  /** a range and working point that are given, not drawn */
  range?: GivenRange
  /** factor on the process times; 1 when left out */
  slower?: number
}

export interface Draft {
  random: SeededRandom
  loop: DrawnLoop
  days: number
  scenario: LoopScenario
}

/** Thrown inside a draw that came out without the wished trouble; the next attempt draws anew. */
export class Redraw extends Error {}


/** Part of the record, on whole minutes, covering a share between low and high. */
export function pieceOf(random: SeededRandom, durationS: number, low: number, high: number): Span {
  const share = low + (high - low) * random.uniform()
  if (share > 0.97) return { fromS: 0, toS: durationS }
  const fromS = Math.round((durationS * (1 - share) * random.uniform()) / 60) * 60
  return { fromS, toS: Math.min(durationS, Math.round((fromS + durationS * share) / 60) * 60) }
}

export interface Trial {
  deviation: number
  opDeviation: number
  periodS: number
  /** spread of the half-periods over their mean */
  unsteadiness: number
  pv: Float64Array
}

/** A short run of the scenario without its events and set-point moves; figures of the error after the first third. */
export function trial(draft: Draft, change: Partial<LoopScenario>, samples = 2400): Trial {
  const { loop, scenario } = draft
  const durationS = Math.min(scenario.durationS, Math.max(samples * scenario.intervalS, 40 * loop.closedLoopS))
  const { record } = simulateLoop(loop.setup, { ...scenario, durationS, events: [], setpoint: { kind: 'constant', value: loop.workingPoint.pv }, compression: null, decimals: { pv: 6, sp: 6, op: 6 }, ...change })
  const from = Math.floor(record.pv.length / 3)
  const n = record.pv.length - from
  let pvSum = 0
  let opSum = 0
  for (let i = from; i < from + n; i++) { pvSum += record.pv[i]; opSum += record.op![i] }
  const pvMean = pvSum / n
  const opMean = opSum / n
  let pvSquare = 0
  let opSquare = 0
  for (let i = from; i < from + n; i++) {
    pvSquare += (record.pv[i] - pvMean) ** 2
    opSquare += (record.op![i] - opMean) ** 2
  }
  const deviation = Math.sqrt(pvSquare / n)
  const opDeviation = Math.sqrt(opSquare / n)
  // period by crossings of the output, which is smoother than the PV, with a band against noise
  const half: number[] = []
  let side = 0
  let last = -1
  for (let i = from; i < from + n; i++) {
    const x = record.op![i] - opMean
    const now = x > 0.4 * opDeviation ? 1 : x < -0.4 * opDeviation ? -1 : side
    if (now === side) continue
    if (last >= 0) half.push(i - last)
    last = i
    side = now
  }
  const mean = half.reduce((a, b) => a + b, 0) / half.length
  const unsteadiness = Math.sqrt(half.reduce((a, b) => a + (b - mean) ** 2, 0) / half.length) / mean
  return { deviation, opDeviation, periodS: half.length > 2 ? 2 * mean * scenario.intervalS : NaN, unsteadiness, pv: record.pv.subarray(from) }
}

/** Scales the coloured load so that the loop's error is a modest share of its tolerance. */
export function calm(draft: Draft): void {
  const { random, loop, scenario } = draft
  const wish = loop.setup.tolerance * (0.1 + 0.22 * random.uniform())
  const noiseOnly = trial(draft, { loads: [] }, 1200).deviation
  if (noiseOnly > 0.35 * loop.setup.tolerance) throw new Redraw('again')
  const loadOnly = trial(draft, { noise: 0 }).deviation
  const factor = Math.min(6, Math.sqrt(Math.max(0.04 * wish * wish, wish * wish - noiseOnly * noiseOnly)) / loadOnly)
  scenario.loads = scenario.loads.map(l => l.kind === 'coloured' ? { ...l, standardDeviation: l.standardDeviation * factor } : l)
  if (random.uniform() < 0.4) scenario.valve = { kind: 'deadBand', width: (loop.setup.type === 'level' ? 0.25 : 0.6) * (0.2 + 0.8 * random.uniform()) }
}

/** Load steps, set-point moves, a cascade's set point, a short spell in manual: what a sound loop lives with. */
export function ordinaryEvents(draft: Draft): void {
  const { random, loop, scenario, days } = draft
  const { tolerance, type } = loop.setup
  const perStep = Math.max(1e-9, peakOf(draft))
  const steps = Math.round(days * 4 * random.uniform())
  scenario.loads.push(randomSteps(random, scenario.durationS, steps, () => Math.min(12, tolerance * (0.5 + 1.5 * random.uniform()) / perStep), loop.closedLoopS))
  const kind = random.uniform()
  if (type !== 'level' && kind < 0.2 && loop.closedLoopS < 120) {
    scenario.cascade = true
    scenario.setpoint = wanderingSetpoint(draft)
  }
  else if (kind < 0.75) scenario.setpoint = movingSetpoint(draft, type === 'temperature' || type === 'analysis' ? 1 : 2, 1, 4)
  if (random.uniform() < 0.2) {
    const from = Math.round(0.8 * scenario.durationS * random.uniform())
    scenario.events.push({ at: from, kind: 'manual', op: null, nudgeEveryS: 0 }, { at: from + 600 + 3000 * random.uniform(), kind: 'automatic' })
  }
}

/** Peak error that a sudden load of one OP unit makes, PV units. */
export function peakOf(draft: Draft): number {
  const { loop, scenario } = draft
  const { record } = simulateLoop(loop.setup, { ...scenario, durationS: Math.max(40 * loop.closedLoopS, 60 * scenario.intervalS), noise: 0, events: [], valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: loop.workingPoint.pv }, compression: null, decimals: { pv: 8, sp: 8, op: 8 }, loads: [{ kind: 'steps', at: [0], size: [1], riseS: 0 }] })
  return record.pv.reduce((m, x) => Math.max(m, Math.abs(x - loop.workingPoint.pv)), 0)
}

export function randomSteps(random: SeededRandom, durationS: number, count: number, size: () => number, riseS: number): LoadPart {
  const at = Array.from({ length: count }, () => durationS * random.uniform()).sort((a, b) => a - b)
  // alternating about a level, so that the sum does not run away
  let level = 0
  const sizes = at.map(() => {
    const wish = (random.uniform() < 0.5 ? -1 : 1) * size()
    const next = Math.abs(level + wish) > Math.abs(wish) * 1.01 ? 0 : level + wish
    const change = next - level
    level = next
    return change
  })
  return { kind: 'steps', at, size: sizes, riseS: riseS * 0.3 }
}

export function movingSetpoint(draft: Draft, perDay: number, low: number, high: number): SetpointProgramme {
  const { random, loop, days } = draft
  const base = loop.workingPoint.pv
  const count = Math.max(2, Math.round(days * perDay * (0.4 + random.uniform())))
  const span = loop.setup.pvHigh - loop.setup.pvLow
  const grain = 10 ** Math.floor(Math.log10(span / 200))
  const tidy = (x: number) => Number((Math.round(x / grain) * grain).toPrecision(6))
  const points = []
  let away = 0
  const at = Array.from({ length: count }, () => draft.scenario.durationS * random.uniform()).sort((a, b) => a - b)
  // far enough from the limits of the output
  const most = loop.linear.kind === 'integrating' ? 0.14 * span : Math.min(0.14 * span, 12 * Math.abs(loop.linear.processGain))
  for (const time of at) {
    const wish = Math.min(most, loop.setup.tolerance * (low + (high - low) * random.uniform())) * (random.uniform() < 0.5 ? -1 : 1)
    away = Math.abs(away + wish) > most ? 0 : away + wish
    points.push({ at: Math.round(time), value: tidy(base + away), ramp: false })
  }
  return { kind: 'points', start: tidy(base), points }
}

/** The set point of a cascade's inner loop: slow against the loop itself. */
export function wanderingSetpoint({ random, loop }: Draft): SetpointProgramme {
  return {
    kind: 'wandering', base: loop.workingPoint.pv, standardDeviation: loop.setup.tolerance * (0.8 + 1.7 * random.uniform()),
    timeConstantS: loop.closedLoopS * (40 + 80 * random.uniform()), seed: random.integer(1 << 30),
  }
}

/** Gain margin, and the period the loop would hunt at; the hold of the sampled controller counts as half a step of dead time. */
export function marginOf({ setup, linear }: DrawnLoop, stepS: number): { margin: number, periodS: number } {
  const ideal = idealTuning(setup.form, setup.gain!, setup.integralTimeS, setup.derivativeTimeS)
  const { gainMargin, phaseCrossover } = margins(
    { ...linear, processGain: Math.abs(linear.processGain), deadTime: linear.deadTime + stepS / 2 },
    { ...ideal, controllerGain: ideal.controllerGain * 100 / (setup.pvHigh - setup.pvLow), measurementFilterTime: setup.filterTimeS ?? 0 },
  )
  return { margin: gainMargin, periodS: phaseCrossover === null ? NaN : 2 * Math.PI / phaseCrossover }
}

/** A swing must be at least nine samples long to be read, and short enough to be seen fifty times. */
export function requireVisible(periodS: number, draft: Draft, options: DrawOptions): void {
  const { scenario } = draft
  if (!(periodS < scenario.durationS / 50)) throw new Redraw('again')
  if (periodS >= 9 * scenario.intervalS) return
  if (options.intervalS === undefined) {
    const finer = [10, 5, 2, 1].find(i => i < scenario.intervalS && periodS >= 9 * i && i >= scenario.stepS)
    if (finer !== undefined) { retime(draft, finer); return }
  }
  throw new Redraw('slower')
}

export function retime(draft: Draft, intervalS: number): void {
  draft.scenario.stepS = intervalS / Math.ceil(intervalS / draft.scenario.stepS - 1e-9)
  draft.scenario.intervalS = intervalS
}
