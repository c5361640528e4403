import type { LoopRecord, LoopSetup, LoopType, Verdict } from '../types'
import { seededRandom, type SeededRandom } from '../statistics/seededRandom'
import { compressTrend } from './compressTrend'
import { drawScenario } from './drawScenario'
import { mixSeed } from './mixSeed'
import { CAUSE_VERDICT, type Cause, type LoopScenario, type SimulatedValve } from './scenario'
import { simulateLoop } from './simulateLoop'

export const WINDOW_CONDITIONS = [
  'stickingSlow', 'stickingQuick', 'stickingUpset', 'stickingCascade',
  'steady', 'loadDrift', 'loadSteps', 'loadSwitching', 'tight', 'sluggish', 'carriedIn', 'noisy', 'cascade', 'setpointSteps', 'quantised', 'thinned', 'backlash',
] as const
export type WindowCondition = typeof WINDOW_CONDITIONS[number]
export const WINDOW_TYPES: readonly LoopType[] = ['flow', 'level', 'pressure', 'temperature']

export interface WindowTruth {
  condition: WindowCondition
  verdict: Verdict
  valve: SimulatedValve
  /** times the stem broke loose in the window, after a rest of a minute or more; 0 where the valve does not stick */
  slips: number
  /** free facts for the reader */
  facts: Record<string, number | string>
}

export interface ShortWindow { setup: LoopSetup, record: LoopRecord, truth: WindowTruth }

const INTERVAL_S = 10
const SAMPLES = 750
const WINDOW_S = INTERVAL_S * SAMPLES
/** A stem that moves after a rest of so many samples has slipped. */
const REST = 6
/** The causes that drawScenario builds whole. */
const WHOLE: Partial<Record<WindowCondition, Cause>> = { tight: 'tightTuning', carriedIn: 'carriedIn', noisy: 'noiseDominated' }

class Redraw extends Error {}

/**
 * A window of about two hours (750 samples at 10 s) out of a longer run, as people export when a loop troubles them: all in automatic, few events.
 * Sticking valves by the three published models, so tuned that one to six slips fall into the window, or many; and sound ones in
 * every condition that could be taken for it, above all slow loops whose PV stays off the set point while the output integrates.
 * `backlash` is neither: its valve is not sound, but does not stick. A quarter of the windows and more, of any condition, are moreover
 * recorded coarsely: few decimals of OP, a coarse transmitter, or a light historian compression.
 *
 * The same arguments give the same window. Mostly 20 to 200 ms. The draws of drawScenario are not touched.
 * @param seed integer 0..2^32-1
 * @throws RangeError when no draw out of 200 shows the condition
 * Source: common practice, no source; valve models as in `valve/models`.
 */
export function drawShortWindow(condition: WindowCondition, type: LoopType, seed: number): ShortWindow {
  const stream = mixSeed(mixSeed(seed, 7919), 16 * WINDOW_CONDITIONS.indexOf(condition) + WINDOW_TYPES.indexOf(type))
  for (let attempt = 0; attempt < 200; attempt++) {
    try {
      return draw(condition, type, mixSeed(stream, attempt))
    }
    catch (error) {
      if (!(error instanceof Redraw)) throw error
    }
  }
  throw new RangeError(`no draw of a ${condition} window on a ${type} loop came out visible (seed ${seed})`)
}

interface Draft { random: SeededRandom, setup: LoopSetup, scenario: LoopScenario, fromS: number }

function draw(condition: WindowCondition, type: LoopType, seed: number): ShortWindow {
  const random = seededRandom(seed)
  const lead = WINDOW_S * (0.5 + 1.5 * random.uniform())
  const cause = WHOLE[condition]
  let drawn: ReturnType<typeof drawScenario>
  try {
    drawn = drawScenario(cause ?? 'healthy', type, mixSeed(seed, 1), { days: cause ? 2 : (WINDOW_S + lead) / 86_400, intervalS: INTERVAL_S, partial: false })
  }
  catch (error) {
    if (error instanceof RangeError) throw new Redraw(error.message)
    throw error
  }
  const { setup } = drawn
  let { scenario } = drawn
  const fromS = Math.round(lead / INTERVAL_S) * INTERVAL_S
  // two hours of the longer run are enough
  scenario = { ...scenario, durationS: fromS + WINDOW_S, events: [] }
  // sites set tolerances wide and narrow
  setup.tolerance = Number((setup.tolerance * 0.5 * 6 ** random.uniform()).toPrecision(3))
  const draft: Draft = { random, setup, scenario, fromS }
  const facts: WindowTruth['facts'] = {}
  let verdict: Verdict = cause ? CAUSE_VERDICT[cause] : 'steady'
  let slips = 0
  if (!cause) {
    // a loop that was calmed down shows its upsets whole: they are drawn small as well
    const quieter = 0.05 * 20 ** random.uniform()
    scenario.loads = scenario.loads.slice(0, 1).map(l => l.kind === 'coloured' ? { ...l, standardDeviation: l.standardDeviation * quieter } : l)
    scenario.setpoint = { kind: 'constant', value: scenario.workingPoint.pv }
    scenario.cascade = false
    if (scenario.valve.kind === 'deadBand' && random.uniform() < 0.5) scenario.valve = { kind: 'sound' }
  }
  // the conditions that are about recording have sound valves only: so sticking ones are recorded coarsely more often, and coarseness says nothing
  const coarse = random.uniform() < (condition.startsWith('sticking') ? 0.4 : 0.25) ? random.integer(3) : -1
  // a coarse transmitter is part of the loop, so it is there before strokes are counted
  if (coarse === 0) scenario.resolution = (setup.pvHigh - setup.pvLow) * 0.0005 * 8 ** random.uniform()
  const slow = (share: number) => { if (random.uniform() < share) { slacken(draft); facts.slack = 1 } }
  const recoversLate = () => facts.slack === 1 && recoveryS(draft) > setup.settlingS
  switch (condition) {
    case 'stickingSlow': case 'stickingQuick': case 'stickingUpset': case 'stickingCascade':
      if (condition === 'stickingCascade') moveSetpoint(draft)
      if (condition === 'stickingUpset') {
        if (random.uniform() < 0.5) drift(draft)
        else stepLoads(draft, 1 + random.integer(3))
      }
      slips = stick(draft, condition === 'stickingQuick', facts)
      verdict = 'huntingValve'
      break
    case 'steady':
      slow(0.3)
      break
    case 'loadDrift':
      slow(0.5)
      drift(draft)
      break
    case 'loadSteps':
      slow(0.4)
      stepLoads(draft, 1 + random.integer(5))
      if (recoversLate()) verdict = 'sluggish'
      break
    case 'loadSwitching': {
      // a consumer that goes on and off: on a slow loop PV stands off, the output integrates, and the next switching takes PV across
      slow(0.75)
      const regular = switchLoad(draft)
      verdict = regular ? 'huntingExternal' : recoversLate() ? 'sluggish' : 'steady'
      break
    }
    case 'sluggish':
      slacken(draft)
      facts.slack = 1
      if (recoveryS(draft) < setup.settlingS) throw new Redraw()
      stepLoads(draft, 2 + random.integer(3))
      if (random.uniform() < 0.3) stepSetpoint(draft)
      verdict = 'sluggish'
      break
    case 'cascade':
      slow(0.4)
      moveSetpoint(draft)
      break
    case 'setpointSteps':
      slow(0.4)
      stepSetpoint(draft)
      break
    case 'quantised':
      slow(0.6)
      drift(draft)
      scenario.resolution = (setup.pvHigh - setup.pvLow) * 0.001 * 10 ** random.uniform()
      if (random.uniform() < 0.5) scenario.noise *= 0.2
      break
    case 'thinned':
      slow(0.4)
      if (random.uniform() < 0.5) drift(draft)
      else stepLoads(draft, 1 + random.integer(3))
      thin(draft)
      break
    case 'backlash':
      slow(0.5)
      if (random.uniform() < 0.6) drift(draft)
      scenario.valve = { kind: 'deadBand', width: Number((0.5 * 12 ** random.uniform()).toPrecision(3)) }
  }
  if (coarse === 1) scenario.decimals = { ...scenario.decimals, op: random.integer(2) }
  else if (coarse === 2 && scenario.compression === null) thin(draft)
  const record = windowOf(simulateLoop(setup, scenario).record, draft)
  return { setup, record, truth: { condition, verdict, valve: scenario.valve, slips, facts } }
}

function windowOf(record: LoopRecord, { scenario, fromS }: Draft): LoopRecord {
  const begin = scenario.startMs + fromS * 1000
  let from = 0
  while (from < record.t.length && record.t[from] < begin) from++
  const part = (a: Float64Array | null) => a && a.slice(from)
  return { ...record, t: record.t.slice(from), pv: part(record.pv)!, sp: part(record.sp), op: part(record.op), mode: record.mode && record.mode.slice(from) }
}

/** Process gain in % of PV span per % of OP; for an integrating process the same after an hour. */
function gainOf({ scenario: { process }, setup }: Draft): number {
  const span = setup.pvHigh - setup.pvLow
  if (process.kind === 'furnace') return 0.8
  return (Math.abs(process.processGain) * 100 / span) * (process.kind === 'integrating' ? 3600 : 1)
}

/** Time constant of what integral action does once proportional action and process have settled. */
function recoveryS(draft: Draft): number {
  const { setup, scenario } = draft
  if (scenario.process.kind === 'integrating') return setup.integralTimeS!
  const k = gainOf(draft) * setup.gain!
  return setup.integralTimeS! * (1 + k) / k
}

/** Little gain and slow integral action, as on loops that somebody once calmed down. */
function slacken({ random, setup, scenario }: Draft): void {
  const weaker = 0.04 * 12 ** random.uniform()
  setup.gain = Number((setup.gain! * weaker).toPrecision(3))
  setup.integralTimeS = Number((setup.integralTimeS! * (scenario.process.kind === 'integrating' ? 1 / weaker : 20 ** random.uniform())).toPrecision(3))
  setup.derivativeTimeS = null
  setup.form = 'ideal'
}

/** Load in OP units that pushes PV by a share of its span before the controller answers; at most 15. */
function loadSize(draft: Draft): number {
  const { random, setup, scenario } = draft
  const wish = setup.tolerance * 0.5 * 12 ** random.uniform()
  const perUnit = scenario.process.kind === 'integrating' ? gainOf(draft) * 0.1 : gainOf(draft)
  return Math.min(15, wish * 100 / (setup.pvHigh - setup.pvLow) / perUnit)
}

function drift(draft: Draft): void {
  const { random, scenario, fromS } = draft
  const sign = random.uniform() < 0.5 ? -1 : 1
  if (random.uniform() < 0.5) scenario.loads.push({ kind: 'coloured', standardDeviation: 0.5 + 4 * random.uniform(), timeConstantS: 600 * 10 ** random.uniform(), seed: random.integer(1 << 30) })
  else {
    const at = [fromS + WINDOW_S * (0.6 * random.uniform() - 0.2), fromS + WINDOW_S * (0.5 + 0.5 * random.uniform())]
    scenario.loads.push({ kind: 'steps', at: at.slice(0, 1 + random.integer(2)), size: [sign * (2 + 10 * random.uniform()), -sign * (2 + 10 * random.uniform())], riseS: 600 + 5000 * random.uniform() })
  }
}

function stepLoads(draft: Draft, count: number): void {
  const { random, scenario, fromS } = draft
  const at = Array.from({ length: count }, () => fromS + WINDOW_S * random.uniform()).sort((a, b) => a - b)
  let level = 0
  const size = at.map(() => {
    const wish = (random.uniform() < 0.5 ? -1 : 1) * loadSize(draft)
    const change = Math.abs(level + wish) > 20 ? -wish : wish
    level += change
    return change
  })
  scenario.loads.push({ kind: 'steps', at, size, riseS: random.uniform() < 0.6 ? 0 : 120 * random.uniform() })
}

/** @returns true when it switches in even beats */
function switchLoad(draft: Draft): boolean {
  const { random, scenario, fromS } = draft
  const size = loadSize(draft)
  const count = 2 + random.integer(8)
  const regular = random.uniform() < 0.4 && count >= 5
  const spacing = WINDOW_S / (count + 1)
  const first = regular ? fromS % spacing : 0
  const at: number[] = []
  for (let s = first + spacing * (regular ? 1 : 0.5 + random.uniform()); s < scenario.durationS; s += spacing * (regular ? 1 : 0.3 + 1.4 * random.uniform())) at.push(s)
  const uneven = regular ? 0 : 0.4 * random.uniform()
  let level = 0
  const sizes = at.map((_, i) => {
    const next = (i % 2 ? -0.5 : 0.5) * size * (1 + uneven * (random.uniform() - 0.5))
    const change = next - level
    level = next
    return change
  })
  scenario.loads.push({ kind: 'steps', at, size: sizes, riseS: random.uniform() < 0.7 ? 0 : 60 * random.uniform() })
  return regular
}

/** What a primary loop asks for: slow waves, or a little at every sample. */
function moveSetpoint({ random, setup, scenario }: Draft): void {
  scenario.cascade = true
  const standardDeviation = setup.tolerance * 0.3 * 10 ** random.uniform()
  const timeConstantS = Math.max(3 * INTERVAL_S, setup.settlingS) * 20 ** random.uniform()
  scenario.setpoint = { kind: 'wandering', base: scenario.workingPoint.pv, standardDeviation, timeConstantS, seed: random.integer(1 << 30) }
}

function stepSetpoint({ random, setup, scenario, fromS }: Draft): void {
  const { pv } = scenario.workingPoint
  const ramp = random.uniform() < 0.25
  const count = 1 + random.integer(5)
  const points = []
  let value = pv
  for (const at of Array.from({ length: count }, () => Math.round(fromS + WINDOW_S * random.uniform())).sort((a, b) => a - b)) {
    if (ramp) points.push({ at: Math.max(0, at - 300), value, ramp: false })
    const wish = (random.uniform() < 0.5 ? -1 : 1) * setup.tolerance * 0.7 * 8 ** random.uniform()
    value = Math.abs(value + wish - pv) > 0.12 * (setup.pvHigh - setup.pvLow) ? pv : value + wish
    points.push({ at, value, ramp })
  }
  points.sort((a, b) => a.at - b.at)
  scenario.setpoint = { kind: 'points', start: pv, points }
}

/** Historian compression that leaves enough to judge by. */
function thin({ random, setup, scenario }: Draft): void {
  const technique = random.uniform() < 0.6 ? 'swingingDoor' as const : 'boxcar' as const
  const { pv, t } = simulateLoop(setup, { ...scenario, compression: null }).record
  const seconds = t.map(x => x / 1000)
  const wish = 1.3 + 1.5 * random.uniform()
  let deviation = Math.max(0.3 * scenario.noise, 1e-4 * (setup.pvHigh - setup.pvLow))
  for (let i = 0; i < 30; i++) {
    let kept = 0
    for (const k of compressTrend(technique, seconds, pv, deviation, 1800)) kept += k
    if (pv.length / kept >= wish) break
    deviation *= 1.25
  }
  scenario.compression = { technique, pvDeviation: deviation, opDeviation: 0.05 + 0.5 * random.uniform(), longestS: 1800, report: random.uniform() < 0.7 ? 'interpolated' : 'archived' }
}

/**
 * A sticking valve on a loop whose tuning gives the wished number of slips in the window: gain and integral action are drawn
 * until the stem slips one to six times (or seven to sixty, `quick`), the jumps stand clear of the noise, and the error
 * is clearly larger than with a sound valve.
 * @returns slips in the window
 */
function stick(draft: Draft, quick: boolean, facts: WindowTruth['facts']): number {
  const { random, setup, scenario, fromS } = draft
  const integrating = scenario.process.kind === 'integrating'
  const model = (['kano', 'choudhury', 'he'] as const)[random.integer(3)]
  const { gain, integralTimeS } = setup
  for (let i = 0; i < 12; i++) {
    const stickBand = Number((0.6 * 16 ** random.uniform()).toPrecision(3))
    const slipJump = Number((Math.min(6, stickBand * (0.2 + 0.8 * random.uniform()))).toPrecision(3))
    const weaker = integrating ? 0.1 * 10 ** random.uniform() : (quick ? 0.2 : 0.03) * (quick ? 5 : 20) ** random.uniform()
    setup.gain = Number((gain! * weaker).toPrecision(3))
    setup.integralTimeS = Number((integralTimeS! * (integrating ? (0.4 + 0.6 * random.uniform()) / weaker : (quick ? 0.7 : 1) * (quick ? 4 : 60) ** random.uniform())).toPrecision(3))
    setup.derivativeTimeS = null
    setup.form = 'ideal'
    scenario.valve = { kind: 'sticking', model, stickBand, slipJump }
    const { record, stem } = simulateLoop(setup, scenario, { stem: true })
    const moved = slipsOf(stem!, record.op!, fromS / INTERVAL_S)
    if (moved.length < (quick ? 7 : 1) || moved.length > (quick ? 60 : 6)) continue
    const sizes = moved.sort((a, b) => a - b)
    const jump = sizes[sizes.length >> 1] * gainOf(draft) * (setup.pvHigh - setup.pvLow) / 100
    if (!integrating && scenario.process.kind !== 'furnace' && jump < Math.max(4 * scenario.noise, 2 * scenario.resolution)) continue
    const sound = deviationOf(simulateLoop(setup, { ...scenario, valve: { kind: 'sound' } }).record, fromS)
    const own = deviationOf(record, fromS)
    if (own < 1.5 * sound || own < 3 * scenario.noise || saturates(record, fromS)) continue
    Object.assign(facts, { model, stickBand, slipJump, jumpOverNoise: Number((jump / scenario.noise).toPrecision(3)), deviationOverTolerance: Number((own / setup.tolerance).toPrecision(3)) })
    return moved.length
  }
  throw new Redraw()
}

/** Sizes of the moves that end a rest, OP unit. */
function slipsOf(stem: Float64Array, op: Float64Array, from: number): number[] {
  const sizes: number[] = []
  let rest = 0
  for (let i = from + 1; i < stem.length; i++) {
    const step = Math.abs(stem[i] - stem[i - 1])
    if (step < 1e-9) { rest++; continue }
    if (rest >= REST && Math.abs(op[i - 1] - op[Math.max(from, i - rest)]) > 0) sizes.push(Math.abs(stem[Math.min(stem.length - 1, i + 2)] - stem[i - 1]))
    rest = 0
  }
  return sizes
}

function deviationOf(record: LoopRecord, fromS: number): number {
  const from = fromS / INTERVAL_S
  let square = 0
  for (let i = from; i < record.pv.length; i++) square += (record.sp![i] - record.pv[i]) ** 2
  return Math.sqrt(square / (record.pv.length - from))
}

function saturates(record: LoopRecord, fromS: number): boolean {
  for (let i = fromS / INTERVAL_S; i < record.op!.length; i++) if (record.op![i] <= 0.5 || record.op![i] >= 99.5) return true
  return false
}
