import type { LoopSetup, LoopType } from '../types'
import { margins } from '../../control/margins/margins'
import { seededRandom, type SeededRandom } from '../statistics/seededRandom'
import { compressTrend } from './compressTrend'
import { drawLoop, type DrawnLoop, type GivenRange } from './drawLoop'
import { idealTuning } from './idealTuning'
import { mixSeed } from './mixSeed'
import { simulateLoop } from './simulateLoop'
import { CAUSES, CAUSE_VERDICT, type Cause, type LoadPart, type LoopScenario, type LoopTruth, type ScenarioTruth, type SetpointProgramme, type Span } from './scenario'

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

interface Draft {
  random: SeededRandom
  loop: DrawnLoop
  days: number
  scenario: LoopScenario
}

/** Thrown inside a draw that came out without the wished trouble; the next attempt draws anew. */
class Redraw extends Error {}

const TYPES: readonly LoopType[] = ['flow', 'pressure', 'level', 'temperature', 'analysis', 'other']
const HOUR = 3600
const DAY = 86_400

/**
 * A loop with a cause of trouble built in: set-up, scenario and truth, drawn from a seed. Well tuned, sensibly disturbed loops
 * are the ground; the cause is then made large enough to matter (a hunting swing of at least 0.7 of the tolerance), by short
 * trial simulations, and draws in which it stays invisible are thrown away.
 *
 * The same arguments give the same draw. Mostly 5 to 30 ms.
 * @param seed integer 0..2^32-1
 * @param options days > 0; intervalS: process times are stretched where the interval could not show the hunting
 * @throws RangeError when no draw out of 120 shows the cause
 * Source: common practice, no source; tuning by S. Skogestad (2003).
 */
export function drawScenario(cause: Cause, type: LoopType, seed: number, options: DrawOptions): { setup: LoopSetup, scenario: LoopScenario, truth: LoopTruth } {
  let slower = options.slower ?? 1
  const stream = mixSeed(seed, 10 * CAUSES.indexOf(cause) + TYPES.indexOf(type))
  for (let attempt = 0; attempt < 120; attempt++) {
    try {
      const random = seededRandom(mixSeed(stream, attempt))
      const intervalS = cause === 'tooSlow' ? undefined : options.intervalS
      const loop = drawLoop(type, random, intervalS, slower, options.range)
      const draft: Draft = { random, loop, days: options.days, scenario: calmScenario(random, loop, options, stream) }
      build(cause, draft, options)
      const { scenario } = draft
      const ms = (s: number) => scenario.startMs + Math.round(s * 1000)
      return {
        setup: loop.setup, scenario,
        truth: {
          tag: loop.setup.tag, cause, verdict: CAUSE_VERDICT[cause], facts: scenario.truth.facts,
          spans: scenario.truth.spans.map(s => ({ fromMs: ms(s.fromS), toMs: ms(s.toS) })), process: scenario.process, valve: scenario.valve,
        },
      }
    }
    catch (error) {
      if (!(error instanceof Redraw)) throw error
      if (error.message === 'slower') slower *= 1.6
      else if (error.message === 'quicker') slower /= 1.6
    }
  }
  throw new RangeError(`no draw of ${cause} on a ${type} loop came out visible (seed ${seed})`)
}

/** The loop at rest with its noise and a slow load, no cause yet. */
function calmScenario(random: SeededRandom, loop: DrawnLoop, options: DrawOptions, seed: number): LoopScenario {
  return {
    startMs: options.startMs ?? Date.UTC(2026, 10, 23), durationS: options.days * DAY, intervalS: loop.intervalS, stepS: loop.stepS,
    seed: mixSeed(seed, random.integer(1 << 30)), process: loop.process, workingPoint: loop.workingPoint,
    valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: loop.workingPoint.pv }, cascade: false,
    loads: [{ kind: 'coloured', standardDeviation: 1, timeConstantS: loop.closedLoopS * (3 + 17 * random.uniform()), seed: random.integer(1 << 30) }],
    noise: loop.noise, resolution: 0, events: [], decimals: loop.decimals, compression: null,
    truth: { cause: 'healthy', spans: [], facts: {} },
  }
}

function build(cause: Cause, draft: Draft, options: DrawOptions): void {
  const { random, loop, scenario } = draft
  const { setup } = loop
  const { tolerance } = setup
  const whole: Span = { fromS: 0, toS: scenario.durationS }
  const truth: ScenarioTruth = { cause, spans: [whole], facts: {} }
  scenario.truth = truth
  const part = (): Span => options.partial !== false && random.uniform() < 1 / 3 ? pieceOf(random, scenario.durationS, 0.35, 0.9) : whole

  switch (cause) {
    case 'healthy':
      calm(draft)
      ordinaryEvents(draft)
      return
    case 'tightTuning':
      tighten(draft, options)
      return
    case 'stickingValve':
      stick(draft, options)
      return
    case 'carriedIn': {
      calm(draft)
      const span = part()
      carryIn(draft, span, options)
      truth.spans = [span]
      return
    }
    case 'sluggish':
      slacken(draft)
      return
    case 'saturated': {
      calm(draft)
      const span = pieceOf(random, scenario.durationS, 0.45, 1)
      const high = random.uniform() < 0.7
      const needed = high ? 103 + 22 * random.uniform() : -3 - 15 * random.uniform()
      scenario.loads.push({ kind: 'steps', at: [span.fromS, span.toS], size: [loop.workingPoint.op - needed, needed - loop.workingPoint.op], riseS: 60 + 1800 * random.uniform() })
      truth.spans = [span]
      truth.facts = { outputNeeded: Math.round(needed) }
      return
    }
    case 'leftInManual': {
      calm(draft)
      ordinaryEvents(draft)
      const span = pieceOf(random, scenario.durationS, 0.4, 1)
      scenario.events = [
        { at: span.fromS, kind: 'manual', op: null, nudgeEveryS: random.uniform() < 0.6 ? Math.max(2 * HOUR, 5 * loop.closedLoopS) * (1 + random.uniform()) : 0 },
        ...(span.toS < scenario.durationS ? [{ at: span.toS, kind: 'automatic' as const }] : []),
      ]
      truth.spans = [span]
      return
    }
    case 'sensorFrozen': case 'sensorNoisy': case 'sensorSpiky': case 'sensorOutOfRange': {
      calm(draft)
      const span = pieceOf(random, scenario.durationS, 0.25, 0.9)
      const pvSpan = setup.pvHigh - setup.pvLow
      const fault = cause === 'sensorFrozen' ? { kind: 'frozen' as const }
        : cause === 'sensorNoisy' ? { kind: 'noisy' as const, standardDeviation: pvSpan * (0.06 + 0.12 * random.uniform()) }
          : cause === 'sensorSpiky' ? { kind: 'spiky' as const, probability: 0.01 + 0.05 * random.uniform(), height: pvSpan * (0.4 + 0.5 * random.uniform()) * (random.uniform() < 0.5 ? -1 : 1) }
            : { kind: 'burnout' as const, value: setup.pvHigh + 0.1 * pvSpan }
      scenario.events = [{ at: span.fromS, kind: 'sensor', fault }, ...(span.toS < scenario.durationS ? [{ at: span.toS, kind: 'sensor' as const, fault: null }] : [])]
      // a frozen value can only be told from a calm one while set point or output move: so the set point does
      if (cause === 'sensorFrozen') scenario.setpoint = movingSetpoint(draft, 3, 2, 5)
      truth.spans = [span]
      return
    }
    case 'noiseDominated':
      calm(draft)
      scenario.noise = tolerance * (0.6 + 0.9 * random.uniform())
      setup.filterTimeS = null
      return
    case 'tooSlow': {
      const carried = random.uniform() < 0.5
      if (carried) { calm(draft); carryIn(draft, whole, { ...options, intervalS: undefined }) }
      else tighten(draft, { ...options, intervalS: undefined })
      const period = Number(truth.facts.periodS)
      const wished = period / (2.3 + 3 * random.uniform())
      const interval = options.intervalS ?? [1, 2, 5, 10, 15, 20, 30, 60, 120, 300, 600].reduce((a, b) => Math.abs(Math.log(b / wished)) < Math.abs(Math.log(a / wished)) ? b : a)
      if (period / interval < 2.1 || period / interval > 6) {
        // the fleet's interval is given: the loop must be as quick as to escape it
        throw new Redraw(period < 2.1 * interval ? 'slower' : options.intervalS === undefined ? 'again' : 'quicker')
      }
      scenario.stepS = interval / Math.ceil(interval / loop.stepS)
      scenario.intervalS = interval
      truth.facts = { ...truth.facts, samplesPerPeriod: Number((period / interval).toFixed(2)), hidden: carried ? 'carriedIn' : 'tightTuning' }
      return
    }
    case 'compressed': {
      const base = (['healthy', 'tightTuning', 'stickingValve', 'carriedIn'] as const)[random.integer(4)]
      build(base, draft, { ...options, partial: false })
      truth.facts = { ...scenario.truth.facts, hidden: base }
      scenario.truth = truth
      compress(draft)
    }
  }
}

/** Part of the record, on whole minutes, covering a share between low and high. */
function pieceOf(random: SeededRandom, durationS: number, low: number, high: number): Span {
  const share = low + (high - low) * random.uniform()
  if (share > 0.97) return { fromS: 0, toS: durationS }
  const fromS = Math.round((durationS * (1 - share) * random.uniform()) / 60) * 60
  return { fromS, toS: Math.min(durationS, Math.round((fromS + durationS * share) / 60) * 60) }
}

interface Trial {
  deviation: number
  opDeviation: number
  periodS: number
  /** spread of the half-periods over their mean */
  unsteadiness: number
  pv: Float64Array
}

/** A short run of the scenario without its events and set-point moves; figures of the error after the first third. */
function trial(draft: Draft, change: Partial<LoopScenario>, samples = 2400): Trial {
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
function calm(draft: Draft): void {
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
function ordinaryEvents(draft: Draft): void {
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
function peakOf(draft: Draft): number {
  const { loop, scenario } = draft
  const { record } = simulateLoop(loop.setup, { ...scenario, durationS: Math.max(40 * loop.closedLoopS, 60 * scenario.intervalS), noise: 0, events: [], valve: { kind: 'sound' }, setpoint: { kind: 'constant', value: loop.workingPoint.pv }, compression: null, decimals: { pv: 8, sp: 8, op: 8 }, loads: [{ kind: 'steps', at: [0], size: [1], riseS: 0 }] })
  return record.pv.reduce((m, x) => Math.max(m, Math.abs(x - loop.workingPoint.pv)), 0)
}

function randomSteps(random: SeededRandom, durationS: number, count: number, size: () => number, riseS: number): LoadPart {
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

function movingSetpoint(draft: Draft, perDay: number, low: number, high: number): SetpointProgramme {
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
function wanderingSetpoint({ random, loop }: Draft): SetpointProgramme {
  return {
    kind: 'wandering', base: loop.workingPoint.pv, standardDeviation: loop.setup.tolerance * (0.8 + 1.7 * random.uniform()),
    timeConstantS: loop.closedLoopS * (40 + 80 * random.uniform()), seed: random.integer(1 << 30),
  }
}

/** Gain margin, and the period the loop would hunt at; the hold of the sampled controller counts as half a step of dead time. */
function marginOf({ setup, linear }: DrawnLoop, stepS: number): { margin: number, periodS: number } {
  const ideal = idealTuning(setup.form, setup.gain!, setup.integralTimeS, setup.derivativeTimeS)
  const { gainMargin, phaseCrossover } = margins(
    { ...linear, processGain: Math.abs(linear.processGain), deadTime: linear.deadTime + stepS / 2 },
    { ...ideal, controllerGain: ideal.controllerGain * 100 / (setup.pvHigh - setup.pvLow), measurementFilterTime: setup.filterTimeS ?? 0 },
  )
  return { margin: gainMargin, periodS: phaseCrossover === null ? NaN : 2 * Math.PI / phaseCrossover }
}

/** A swing must be at least nine samples long to be read, and short enough to be seen fifty times. */
function requireVisible(periodS: number, draft: Draft, options: DrawOptions): void {
  const { scenario } = draft
  if (!(periodS < scenario.durationS / 50)) throw new Redraw('again')
  if (periodS >= 9 * scenario.intervalS) return
  if (options.intervalS === undefined) {
    const finer = [10, 5, 2, 1].find(i => i < scenario.intervalS && periodS >= 9 * i && i >= scenario.stepS)
    if (finer !== undefined) { retime(draft, finer); return }
  }
  throw new Redraw('slower')
}

function retime(draft: Draft, intervalS: number): void {
  draft.scenario.stepS = intervalS / Math.ceil(intervalS / draft.scenario.stepS - 1e-9)
  draft.scenario.intervalS = intervalS
}

/** Gain up (in half of the draws integral time down first) to a gain margin of 1.05 to 1.35. */
function tighten(draft: Draft, options: DrawOptions): void {
  const { random, loop, scenario } = draft
  const { setup } = loop
  if (loop.linear.kind === 'integrating') shortenIntegral(draft)
  else if (random.uniform() < 0.5) setup.integralTimeS = Number((setup.integralTimeS! * (0.35 + 0.4 * random.uniform())).toPrecision(3))
  let periodS = Number(scenario.truth.facts.periodS)
  if (loop.linear.kind !== 'integrating') {
    const before = marginOf(loop, scenario.stepS)
    const wish = 1.05 + 0.3 * random.uniform()
    if (!Number.isFinite(before.margin) || before.margin < wish) throw new Redraw('again')
    setup.gain = Number((setup.gain! * before.margin / wish).toPrecision(4))
    periodS = marginOf(loop, scenario.stepS).periodS
    scenario.truth.facts = { gainMargin: Number(wish.toFixed(3)), periodS: Number(periodS.toPrecision(4)) }
  }
  requireVisible(periodS, draft, options)
  const swing = setup.tolerance * (0.9 + (loop.linear.kind === 'integrating' ? 1 : 2.1) * random.uniform()) / Math.SQRT2
  let factor = 1
  for (let i = 0; i < 2; i++) {
    const { deviation } = trial(draft, {}, 4000)
    factor = Math.min(swing / deviation, 4)
    scenario.noise = Math.min(scenario.noise * factor, 1.6 * loop.noise)
    scenario.loads = scenario.loads.map(l => l.kind === 'coloured' ? { ...l, standardDeviation: Math.min(7, l.standardDeviation * factor) } : l)
  }
  const seen = trial(draft, {}, 4000)
  if (!(seen.deviation * Math.SQRT2 > 0.7 * setup.tolerance) || seen.opDeviation > 20 || seen.deviation < 3 * scenario.noise) throw new Redraw('again')
  if (random.uniform() < 0.4) scenario.loads.push(randomSteps(random, scenario.durationS, Math.round(draft.days * 3 * random.uniform()), () => 1 + 3 * random.uniform(), loop.closedLoopS))
  if (random.uniform() < 0.3) scenario.setpoint = movingSetpoint(draft, 1, 1, 3)
  if (random.uniform() < 0.3) scenario.valve = { kind: 'deadBand', width: 0.1 + 0.3 * random.uniform() }
}

/**
 * A level hunts from too short an integral time at a modest gain: two integrators in a row, with hardly any phase left.
 * Phase margin atan(w Ti) - w delay at the crossover w, which for w Ti << 1 is about sqrt(K Kc / Ti).
 */
function shortenIntegral({ random, loop, scenario }: Draft): void {
  const { setup } = loop
  const k = Math.abs(loop.linear.processGain) * 100 / (setup.pvHigh - setup.pvLow)
  setup.gain = Number((setup.gain! * (0.12 + 0.3 * random.uniform())).toPrecision(3))
  const delay = loop.linear.deadTime + scenario.stepS / 2 + (setup.filterTimeS ?? 0)
  const wish = (2 + 5 * random.uniform()) * Math.PI / 180
  const crossover = (Ti: number) => {
    const a = (k * setup.gain!) ** 2
    return Math.sqrt((a + Math.sqrt(a * a + 4 * a / (Ti * Ti))) / 2)
  }
  let low = 1e-3
  let high = 1e6
  for (let i = 0; i < 80; i++) {
    const Ti = Math.sqrt(low * high)
    const w = crossover(Ti)
    if (Math.atan(w * Ti) - w * delay > wish) high = Ti
    else low = Ti
  }
  if (high > 0.5 * setup.integralTimeS!) throw new Redraw('again')
  setup.integralTimeS = Number(high.toPrecision(3))
  scenario.truth.facts = { phaseMarginDegrees: Number((wish * 180 / Math.PI).toFixed(1)), periodS: Number((2 * Math.PI / crossover(high)).toPrecision(4)) }
}

function stick(draft: Draft, options: DrawOptions): void {
  const { random, loop, scenario } = draft
  const integrating = loop.linear.kind === 'integrating'
  if (integrating) {
    // averaging level control: the swing of a stuck valve grows as the gain falls
    const weaker = 0.2 + 0.5 * random.uniform()
    loop.setup.gain = Number((loop.setup.gain! * weaker).toPrecision(3))
    loop.setup.integralTimeS = Number((loop.setup.integralTimeS! * (0.6 + 0.4 * random.uniform()) / weaker).toPrecision(3))
    loop.closedLoopS /= weaker
  }
  calm(draft)
  const model = (['kano', 'choudhury', 'he'] as const)[random.integer(3)]
  const stickBand = 1 + 7 * random.uniform()
  const slipJump = Math.min(4, stickBand * (integrating ? random.uniform() : 0.25 + 0.75 * random.uniform()))
  const sound = trial(draft, { valve: { kind: 'sound' } })
  scenario.valve = { kind: 'sticking', model, stickBand: Number(stickBand.toFixed(2)), slipJump: Number(slipJump.toFixed(2)) }
  const samples = integrating ? 12_000 : 4000
  const seen = trial(draft, {}, samples)
  if (!(seen.deviation * Math.SQRT2 > (integrating ? 0.6 : 0.7) * loop.setup.tolerance && seen.deviation > (integrating ? 4 : 2) * sound.deviation)) throw new Redraw('again')
  // irregular limit cycles exist, but most valves that people complain of cycle
  if (seen.opDeviation > (integrating ? 26 : 20) || !(seen.periodS > 0) || (seen.unsteadiness > 0.35 && random.uniform() < 0.9)) throw new Redraw('again')
  requireVisible(seen.periodS, draft, options)
  // the load wanders by itself, and moves the cycle's period with it
  if (random.uniform() < 0.5) scenario.loads.push(randomSteps(random, scenario.durationS, Math.round(draft.days * 3 * random.uniform()), () => 1 + 4 * random.uniform(), loop.closedLoopS))
  if (random.uniform() < 0.3) scenario.setpoint = movingSetpoint(draft, 1, 1, 3)
  if (random.uniform() < 0.35) {
    const from = scenario.durationS * 0.8 * random.uniform()
    const length = Math.min(0.15 * scenario.durationS, Math.max(2 * HOUR, 8 * seen.periodS))
    scenario.events.push({ at: from, kind: 'manual', op: null, nudgeEveryS: 0 }, { at: from + length, kind: 'automatic' })
  }
  scenario.truth.facts = { model, stickBand: scenario.valve.stickBand, slipJump: scenario.valve.slipJump, periodS: Number(seen.periodS.toPrecision(3)) }
}

function carryIn(draft: Draft, span: Span, options: DrawOptions): void {
  const { random, loop, scenario } = draft
  const own = loop.linear.kind === 'integrating' ? NaN : marginOf(loop, scenario.stepS).periodS
  const base = Number.isFinite(own) ? own : 6 * loop.closedLoopS
  const periodS = options.periodS ?? base * 0.9 * 8 ** random.uniform()
  requireVisible(periodS, draft, options)
  const shape = (['sine', 'sine', 'triangle', 'square'] as const)[random.integer(4)]
  const unit: LoadPart = { kind: 'periodic', periodS: Number(periodS.toPrecision(5)), amplitude: 1, shape, phase: random.uniform() }
  const seen = trial(draft, { noise: 0, loads: [unit], valve: { kind: 'sound' } }, Math.ceil(25 * periodS / scenario.intervalS))
  const wish = loop.setup.tolerance * (0.9 + 2 * random.uniform()) / Math.SQRT2
  const amplitude = wish / seen.deviation
  if (!(amplitude < 40) || amplitude * seen.opDeviation > 16) throw new Redraw('again')
  scenario.loads.push({ ...unit, amplitude, spans: [span] })
  if (random.uniform() < 0.3) scenario.setpoint = movingSetpoint(draft, 1, 1, 3)
  scenario.truth.facts = { periodS: unit.periodS, shape, periodRatio: Number((periodS / base).toFixed(2)) }
}

/** Gain down and integral time up until load steps take hours (or many settling horizons) to be worked off. */
function slacken(draft: Draft): void {
  const { random, loop, scenario } = draft
  const { setup } = loop
  calm(draft)
  const weaker = 0.06 + 0.16 * random.uniform()
  const longer = loop.linear.kind === 'integrating' ? 1.3 / weaker : 3 + 5 * random.uniform()
  setup.gain = Number((setup.gain! * weaker).toPrecision(3))
  setup.integralTimeS = Number((setup.integralTimeS! * longer).toPrecision(3))
  setup.derivativeTimeS = null
  setup.form = 'ideal'
  const k = Math.abs(loop.linear.processGain) * 100 / (setup.pvHigh - setup.pvLow)
  // time constant of the slow recovery: integral action alone once the process has settled
  const recoveryS = loop.linear.kind === 'integrating' ? setup.integralTimeS : setup.integralTimeS * (1 + k * setup.gain) / (k * setup.gain)
  if (recoveryS < 0.7 * setup.settlingS || recoveryS > scenario.durationS / 40) throw new Redraw('again')
  const before = trial(draft, {})
  const coloured = Math.min(1, 0.35 * setup.tolerance / before.deviation)
  scenario.loads = scenario.loads.map(l => l.kind === 'coloured' ? { ...l, standardDeviation: l.standardDeviation * coloured } : l)
  const peak = peakOf({ ...draft, loop: { ...loop, closedLoopS: Math.max(loop.closedLoopS, recoveryS / 10) } })
  const count = Math.max(10, Math.min(400, Math.round(scenario.durationS / (recoveryS * (4 + 8 * random.uniform())))))
  const wish = setup.tolerance * (2 + 3.5 * random.uniform())
  if (wish / peak > 22) throw new Redraw('again')
  scenario.loads.push(randomSteps(random, scenario.durationS, count, () => wish / peak * (0.6 + 0.8 * random.uniform()), loop.closedLoopS))
  scenario.truth.facts = { gainShare: Number(weaker.toFixed(3)), recoveryS: Number(recoveryS.toPrecision(3)) }
}

function compress(draft: Draft): void {
  const { random, loop, scenario } = draft
  const technique = random.uniform() < 0.6 ? 'swingingDoor' as const : 'boxcar' as const
  const { pv } = trial(draft, {}, 6000)
  const t = pv.map((_, i) => i * scenario.intervalS)
  let deviation = loop.setup.tolerance * 0.25
  const wish = 4.5 + 8 * random.uniform()
  for (let i = 0; i < 25; i++) {
    const kept = compressTrend(technique, t, pv, deviation, 4 * HOUR).reduce((a, b) => a + b, 0)
    if (pv.length / kept >= wish) break
    deviation *= 1.3
  }
  scenario.compression = { technique, pvDeviation: deviation, opDeviation: 0.6, longestS: 4 * HOUR, report: 'interpolated' }
  scenario.truth.facts = { ...scenario.truth.facts, technique, pvDeviation: Number(deviation.toPrecision(3)) }
}
