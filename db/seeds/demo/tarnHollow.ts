/**
 * Tarn Hollow Tileworks, the invented demo plant: its loops with their set-ups, and three weeks of records for them. Every
 * loop can be made by itself, from seeds alone, so that worker threads share the work.
 */
import type { LoopRecord, LoopSetup } from '../../../shared/assessment/types'
import { seededRandom } from '../../../shared/assessment/statistics/seededRandom'
import { drawScenario } from '../../../shared/assessment/simulation/drawScenario'
import { errorDeviation } from '../../../shared/assessment/simulation/errorDeviation'
import { mixSeed } from '../../../shared/assessment/simulation/mixSeed'
import { simulatePlantLoop, type PlantLoop, type PlantMemory } from '../../../shared/assessment/simulation/simulatePlant'
import type { Cause, LoopScenario, SetpointProgramme, SimulatedLoop, SimulationEvent } from '../../../shared/assessment/simulation/scenario'
import { nextWeek, weekFrame, weekOf } from '../../../shared/assessment/week/isoWeek'
import { DEMO_LINES, type DemoLine } from './tarnHollowLoops'
import { BUMP_TESTS, CASCADES, GROUP, OUTAGE, STORIES, type Story } from './tarnHollowStories'

export interface DemoLoop {
  setup: LoopSetup
  description: string
  area: string
  unit: string
  intervalS: number
  /** what is built in, for people; empty for most */
  story: string
  cause: Cause
}

export interface DemoWeeks { startMs: number, weeks: number, zone: string }

const SEED = 2611
const DAY = 86_400
const HOUR = 3600
/** The story is three weeks long whatever part of it is asked for. */
const STORY_DAYS = 21
const INDEX = new Map(DEMO_LINES.map((line, i) => [line.tag, i]))
const SECONDARIES = new Map(Object.entries(CASCADES).map(([primary, secondary]) => [secondary, primary]))

const SCATTERED: [Cause, number][] = [
  ['tightTuning', 0.06], ['stickingValve', 0.06], ['sluggish', 0.05], ['carriedIn', 0.02], ['noiseDominated', 0.02], ['saturated', 0.015], ['leftInManual', 0.015],
]

interface Drawn { setup: LoopSetup, scenario: LoopScenario, story: string }
const drawn = new Map<string, Drawn>()

/** All loops with their set-ups. Takes some seconds on the first call in a process. */
export function demoPlant(): DemoLoop[] {
  return DEMO_LINES.map((line) => {
    const { setup, scenario, story } = drawDemoLoop(line)
    return { setup, description: line.description, area: line.area, unit: line.unit, intervalS: line.intervalS, story, cause: scenario.truth.cause }
  })
}

/** Declared stops of an area: [fromMs, toMs). */
export function demoOutages({ startMs }: DemoWeeks): { area: string, fromMs: number, toMs: number, reason: string }[] {
  return [{ area: OUTAGE.area, fromMs: startMs + Math.round(OUTAGE.fromDay * DAY) * 1000, toMs: startMs + Math.round(OUTAGE.toDay * DAY) * 1000, reason: OUTAGE.reason }]
}

const memories = new Map<string, PlantMemory>()

/**
 * Record and truth of one loop of the demo plant.
 * @param index 0..demoPlant().length-1
 * @param weeks startMs: a Monday 00:00 in the zone; weeks: 1..3, more goes on without new events
 */
export function simulateDemoLoopWithTruth(index: number, weeks: DemoWeeks): SimulatedLoop {
  const line = DEMO_LINES[index]
  if (!line) throw new RangeError(`loop index must be 0..${DEMO_LINES.length - 1}, got ${index}`)
  const durationS = (endOf(weeks) - weeks.startMs) / 1000
  const place = (tag: string): PlantLoop => {
    const of = DEMO_LINES[INDEX.get(tag)!]
    const { setup, scenario } = drawDemoLoop(of)
    return { setup, scenario: { ...scenario, startMs: weeks.startMs, durationS }, area: of.area, description: of.description, primary: null, carriedFrom: [] }
  }
  const loop = place(line.tag)
  const plan = [loop, place(GROUP.source)]
  const delayS = GROUP.members[line.tag]
  if (delayS !== undefined) {
    const part = loop.scenario.loads.find(l => l.kind === 'periodic')
    const gain = part?.kind === 'periodic' ? part.amplitude / (Math.SQRT2 * errorDeviation(plan[1].setup, plan[1].scenario)) : 0
    loop.scenario = { ...loop.scenario, loads: loop.scenario.loads.filter(l => l !== part) }
    loop.carriedFrom = [{ source: 1, gain, lagS: 0, delayS }]
  }
  if (CASCADES[line.tag]) plan.push({ ...place(CASCADES[line.tag]), primary: 0 })
  const primary = SECONDARIES.get(line.tag)
  if (primary) {
    plan.push(place(primary))
    loop.primary = 2
  }
  const key = `${weeks.startMs}/${durationS}`
  let memory = memories.get(key)
  if (!memory) {
    memories.clear() // one source is enough to keep: a thread makes one set of weeks at a time
    memories.set(key, memory = new Map())
  }
  return simulatePlantLoop(plan, 0, memory)
}

/** Record of one loop of the demo plant; see `simulateDemoLoopWithTruth`. */
export function simulateDemoLoop(index: number, weeks: DemoWeeks): LoopRecord {
  return simulateDemoLoopWithTruth(index, weeks).record
}

function endOf({ startMs, weeks, zone }: DemoWeeks): number {
  let id = weekOf(startMs, zone)
  if (weekFrame(id, zone).hourEdges[0] !== startMs) return startMs + weeks * 7 * DAY * 1000
  for (let i = 0; i < weeks; i++) id = nextWeek(id)
  return weekFrame(id, zone).hourEdges[0]
}

function drawDemoLoop(line: DemoLine): Drawn {
  let result = drawn.get(line.tag)
  if (!result) drawn.set(line.tag, result = makeDemoLoop(line))
  return result
}

function makeDemoLoop(line: DemoLine): Drawn {
  const index = INDEX.get(line.tag)!
  const seed = mixSeed(SEED, index)
  const random = seededRandom(seed)
  const isOven = line.unit === 'Sample ovens'
  const isShuttle = line.unit.startsWith('Shuttle')
  const special = isOven || isShuttle || CASCADES[line.tag] !== undefined || SECONDARIES.has(line.tag)
  const story: Story = STORIES[line.tag]
    ?? (line.tag in GROUP.members ? { cause: 'carriedIn', text: 'Hunts with the feed water valve of boiler 1.' } : { cause: special || line.area === 'Boiler house' ? 'healthy' : scattered(random.uniform(), line), text: '' })
  const source = line.tag in GROUP.members ? drawDemoLoop(DEMO_LINES[INDEX.get(GROUP.source)!]) : null
  const draw = (cause: Cause, other = 0) => drawScenario(cause, line.type, seed + other, {
    days: STORY_DAYS, intervalS: line.intervalS, partial: false, startMs: 0, slower: line.slower ?? (line.pvUnit === 'degC' && line.high > 1000 ? 1.5 : 1),
    periodS: source ? Number(source.scenario.truth.facts.periodS) : undefined,
    range: { low: line.low, high: line.high, unit: line.pvUnit, at: line.at, direct: line.direct, tolerance: line.tolerance },
  })
  let { setup, scenario } = drawOrHealthy(draw, story.cause)
  if (line.tag === GROUP.source) {
    // the plot needs a steady cycle of some minutes
    for (let other = 1; other < 60; other++) {
      const { model, periodS } = scenario.truth.facts
      if (model === 'kano' && Number(periodS) > 140 && Number(periodS) < 420) break
      ;({ setup, scenario } = draw('stickingValve', other))
    }
  }
  setup.tag = line.tag
  setup.priority = line.priority
  setup.normalModes = ['AUTO']
  if (source) {
    setup.upstream = [GROUP.source]
    scenario.truth.facts = { ...scenario.truth.facts, source: GROUP.source }
  }
  if (scenario.cascade) {
    // a set point that moves by itself belongs to the cascades that are modelled as such
    scenario.cascade = false
    scenario.setpoint = { kind: 'constant', value: line.at }
  }
  tell(story, setup, scenario)
  if (story.fromDay === undefined && story.toDay === undefined) comeAndGo(line, story, setup, scenario)
  bumpTests(line, setup, scenario)
  if (isOven) ({ setup, scenario } = oven(line, setup, scenario))
  if (isShuttle) shuttle(line, setup, scenario)
  if (SECONDARIES.has(line.tag)) secondary(line, setup, scenario)
  if (CASCADES[line.tag]) {
    scenario.valve = { kind: 'sound' }
    scenario.stepS = scenario.intervalS
    scenario.events = []
  }
  commonUpsets(line, scenario)
  if (line.area === OUTAGE.area) scenario.events.push({ at: Math.round(OUTAGE.fromDay * DAY), kind: 'shutDown' }, { at: Math.round(OUTAGE.toDay * DAY), kind: 'startUp' })
  return { setup, scenario, story: story.text }
}

function scattered(x: number, line: DemoLine): Cause {
  let left = x
  for (const [cause, share] of SCATTERED) {
    left -= share
    // nobody leaves a level in manual unattended
    if (left < 0) return cause === 'leftInManual' && line.type === 'level' ? 'healthy' : cause
  }
  return 'healthy'
}

/** Not every trouble shows on every type of loop: those get none. */
function drawOrHealthy(draw: (cause: Cause) => { setup: LoopSetup, scenario: LoopScenario }, cause: Cause): { setup: LoopSetup, scenario: LoopScenario } {
  try { return draw(cause) }
  catch (error) {
    if (!(error instanceof RangeError)) throw error
    return draw('healthy')
  }
}

/** Puts the cause of a story into its days. */
function tell({ cause, fromDay, toDay }: Story, setup: LoopSetup, scenario: LoopScenario): void {
  if (scenario.truth.cause !== cause) return
  const spanned = fromDay !== undefined || toDay !== undefined
  const from = Math.round((fromDay ?? 0) * DAY)
  const to = Math.round((toDay ?? STORY_DAYS) * DAY)
  const events: SimulationEvent[] = []
  switch (cause) {
    case 'leftInManual':
      if (!spanned) return
      scenario.events = scenario.events.map(e => ({ ...e, at: e.kind === 'manual' ? from : to }))
      if (toDay === undefined) scenario.events = scenario.events.filter(e => e.kind === 'manual')
      break
    case 'sensorFrozen': case 'sensorNoisy': case 'sensorSpiky': case 'sensorOutOfRange':
      if (!spanned) return
      scenario.events = scenario.events.filter(e => e.kind === 'sensor' && (e.fault !== null || toDay !== undefined)).map(e => ({ ...e, at: e.kind === 'sensor' && e.fault !== null ? from : to }))
      break
    case 'saturated':
      if (!spanned) return
      scenario.loads = scenario.loads.map(l => l.kind === 'steps' && l.at.length === 2 ? { ...l, at: [from, toDay === undefined ? 1e9 : to] } : l)
      break
    case 'carriedIn':
      if (!spanned) return
      scenario.loads = scenario.loads.map(l => l.kind === 'periodic' ? { ...l, spans: [{ fromS: from, toS: toDay === undefined ? 1e9 : to }] } : l)
      break
    case 'stickingValve':
      if (toDay === undefined) return
      // the technician takes it to manual, works on it, gives it back
      events.push({ at: to - 1.5 * HOUR, kind: 'manual', op: null, nudgeEveryS: 0 }, { at: to - 600, kind: 'valve', valve: { kind: 'deadBand', width: 0.2 } }, { at: to, kind: 'automatic' })
      scenario.events = [...scenario.events.filter(e => e.at < to - 0.3 * DAY), ...events]
      break
    case 'tightTuning': {
      if (!spanned) return
      const level = setup.type === 'level'
      const margin = Number(scenario.truth.facts.gainMargin ?? 1)
      const tight = { gain: Number((setup.gain! * Math.max(1, margin / 1.15)).toPrecision(4)), integralTimeS: setup.integralTimeS }
      const calm = { gain: Number((tight.gain / (level ? 0.5 : 2.8)).toPrecision(2)), integralTimeS: Number((tight.integralTimeS! * (level ? 6 : 1.6)).toPrecision(2)) }
      // broad excitation: the tight loop answers with its own period, the calm one hardly at all
      scenario.loads = scenario.loads.map(l => l.kind === 'coloured' ? { ...l, timeConstantS: Number(scenario.truth.facts.periodS) / 8 } : l)
      const swing = errorDeviation({ ...setup, ...tight }, scenario) / 100 * (setup.pvHigh - setup.pvLow)
      scenario.loads = scenario.loads.map(l => l.kind === 'coloured' ? { ...l, standardDeviation: l.standardDeviation * setup.tolerance / swing } : l)
      setup.gain = tight.gain
      scenario.events.push({ at: 0, kind: 'tuning', tuning: fromDay === undefined ? tight : calm })
      if (fromDay !== undefined) scenario.events.push({ at: from, kind: 'tuning', tuning: tight })
      if (toDay !== undefined) {
        scenario.events.push({ at: to, kind: 'tuning', tuning: calm })
        // the tuning record holds what is set now
        setup.gain = calm.gain
        setup.integralTimeS = calm.integralTimeS
      }
      break
    }
    default: return
  }
  scenario.truth.spans = [{ fromS: from, toS: to }]
}

/**
 * Set-point steps that somebody made on purpose, quiet before and after, so that the tuning desk has something to read a
 * model from: up, down, up and back, in the middle of the week.
 */
function bumpTests(line: DemoLine, setup: LoopSetup, scenario: LoopScenario): void {
  const days = BUMP_TESTS[line.tag]
  if (!days || scenario.setpoint.kind !== 'constant') return
  const { value } = scenario.setpoint
  const size = 0.08 * (setup.pvHigh - setup.pvLow)
  const hold = Math.max(2 * HOUR, 8 * setup.settlingS)
  scenario.setpoint = { kind: 'points', start: value, points: days.flatMap(day => [1, 0, -1, 0].map((up, k) => ({ at: Math.round(day * DAY + k * hold), value: value + up * size, ramp: false }))) }
}

/** The feed-water valve sticks at high fire, every afternoon. */
const AFTERNOON = { from: 13, hours: 9 }

/**
 * Hunting comes and goes in a plant: with the load, the shift, the product. One in four hunts all the time; the others in
 * certain hours of the day, or for days on end where their cycle is too long for that.
 */
function comeAndGo(line: DemoLine, story: Story, setup: LoopSetup, scenario: LoopScenario): void {
  const { cause, facts } = scenario.truth
  // members of the group follow their source
  if (!['stickingValve', 'tightTuning', 'carriedIn'].includes(cause) || line.tag in GROUP.members) return
  const random = seededRandom(mixSeed(SEED, 5000 + INDEX.get(line.tag)!))
  const isSource = line.tag === GROUP.source
  const period = Number(facts.periodS)
  if (!Number.isFinite(period) || story.always || (!isSource && random.uniform() < 0.25)) return
  const spans: { fromS: number, toS: number }[] = []
  if (isSource || period * 14 < 6 * HOUR) {
    const from = isSource ? AFTERNOON.from : 4 + random.integer(14)
    const hours = isSource ? AFTERNOON.hours : 6 + random.integer(6)
    for (let day = 0; day < STORY_DAYS; day++) {
      if (!isSource && random.uniform() < 0.2) continue
      const at = day * DAY + (from + 1.6 * (random.uniform() - 0.5)) * HOUR
      spans.push({ fromS: Math.round(at), toS: Math.round(at + (hours + 1.6 * (random.uniform() - 0.5)) * HOUR) })
    }
  }
  else {
    for (let at = DAY * random.uniform(); at < STORY_DAYS * DAY;) {
      const length = Math.max(14 * period, DAY * (0.7 + 1.6 * random.uniform()))
      spans.push({ fromS: Math.round(at), toS: Math.round(at + length) })
      at += length + DAY * (0.6 + 1.8 * random.uniform())
    }
  }
  const { valve } = scenario
  const tight = { gain: setup.gain ?? 1, integralTimeS: setup.integralTimeS }
  // a stand-in for a process gain that falls with the load: seen from outside the same
  const calm = { gain: (setup.gain ?? 1) / (setup.type === 'level' ? 0.6 : 2.8), integralTimeS: (setup.integralTimeS ?? 1) * (setup.type === 'level' ? 6 : 1.6) }
  // where the calm tuning cannot hold the tolerance the loop was made tight for a reason, and stays so
  if (cause === 'tightTuning' && errorDeviation({ ...setup, ...calm }, scenario) / 100 * (setup.pvHigh - setup.pvLow) > 0.6 * setup.tolerance) return
  if (cause === 'carriedIn') scenario.loads = scenario.loads.map(l => l.kind === 'periodic' ? { ...l, spans } : l)
  else {
    const set = (at: number, bad: boolean): SimulationEvent => (cause === 'stickingValve' ? { at, kind: 'valve', valve: bad ? valve : { kind: 'deadBand', width: 0.2 } } : { at, kind: 'tuning', tuning: bad ? tight : calm })
    scenario.events.push(set(0, false), ...spans.flatMap(span => [set(span.fromS, true), set(span.toS, false)]))
  }
  scenario.truth.spans = spans
}

/** On-off heating: the third oven's sensor sits far from the heater, the fourth's band is too narrow for its contactor. */
function oven(line: DemoLine, setup: LoopSetup, scenario: LoopScenario): Pick<Drawn, 'setup' | 'scenario'> {
  const number = Number(line.tag.at(-1))
  const hysteresis = [4, 4, 4, 0.6][number - 1]
  return {
    setup: { ...setup, form: 'onOff', gain: null, integralTimeS: null, derivativeTimeS: null, filterTimeS: null, setpointWeight: null, hysteresis, action: 'reverse', settlingS: 1800 },
    scenario: {
      ...scenario, stepS: 5, noise: 0.08, resolution: 0.1, valve: { kind: 'sound' }, cascade: false, decimals: { pv: 1, sp: 1, op: 0 },
      process: { kind: 'furnace', timeConstant: 1100 + 150 * number, sensorLag: 10, deadTime: number === 3 ? 70 : 15, ambient: 20, radiationShare: 0.15 },
      workingPoint: { pv: line.at, op: 36 + 3 * number }, setpoint: { kind: 'constant', value: line.at },
      events: [], loads: [{ kind: 'pulses', at: workingHours(seededRandom(mixSeed(SEED, 900 + number)), 4), widthS: 120, size: -45, recoveryS: 240 }],
      truth: { ...scenario.truth, facts: { hysteresis, control: 'onOff' } },
    },
  }
}

/** Times (s) during the day shift of working days, so many a day. */
function workingHours(random: ReturnType<typeof seededRandom>, perDay: number): number[] {
  const at: number[] = []
  for (let day = 0; day < STORY_DAYS; day++) {
    if (day % 7 > 4) continue
    for (let i = 0; i < perDay; i++) at.push(day * DAY + (6 + 12 * (i + 0.2 + 0.6 * random.uniform()) / perDay) * HOUR)
  }
  return at.map(Math.round)
}

/** Batch firing: heat up in nine hours, soak, cool under control, door open while cars change, wait; then again. */
function shuttle(line: DemoLine, setup: LoopSetup, scenario: LoopScenario): void {
  const kiln = Number(line.unit.at(-1))
  const zone = Number(line.tag.at(-1))
  const top = line.at - 6 * zone
  const points: Extract<SetpointProgramme, { kind: 'points' }>['points'] = []
  const doors: number[] = []
  for (let at = (kiln * 7 - 4) * HOUR; at < STORY_DAYS * DAY; at += 34 * HOUR) {
    points.push({ at, value: 420, ramp: false }, { at: at + 9 * HOUR, value: top, ramp: true }, { at: at + 12 * HOUR, value: top, ramp: true }, { at: at + 26 * HOUR, value: 420, ramp: true })
    doors.push(at + 28 * HOUR, at + 30 * HOUR)
  }
  Object.assign(setup, { form: 'ideal', gain: 4.5, integralTimeS: 1300, derivativeTimeS: 40, filterTimeS: 5, setpointWeight: 1, deadTimeS: 35, settlingS: 3600 } satisfies Partial<LoopSetup>)
  Object.assign(scenario, {
    stepS: 15, noise: 0.6, process: { kind: 'furnace', timeConstant: 2300 + 120 * zone, sensorLag: 30, deadTime: 35, ambient: 20, radiationShare: 0.7 },
    workingPoint: { pv: line.at, op: 58 + 2 * zone }, setpoint: { kind: 'points', start: line.at, points }, events: [], cascade: false, valve: { kind: 'deadBand', width: 0.3 },
    loads: [
      { kind: 'coloured', standardDeviation: 0.8, timeConstantS: 1800, seed: mixSeed(SEED, 700 + zone + 10 * kiln) },
      { kind: 'pulses', at: doors, widthS: 1500, size: zone === 1 ? -14 : -8, recoveryS: 900 },
    ],
  } satisfies Partial<LoopScenario>)
  scenario.truth.facts = { programme: 'batch firing', doors: doors.length }
}

/** The inner loop of a cascade rests where the outer loop's output rests. */
function secondary(line: DemoLine, setup: LoopSetup, scenario: LoopScenario): void {
  const outer = drawDemoLoop(DEMO_LINES[INDEX.get(SECONDARIES.get(line.tag)!)!])
  scenario.workingPoint = { pv: line.low + (line.high - line.low) * outer.scenario.workingPoint.op / 100, op: scenario.workingPoint.op }
  scenario.cascade = true
  scenario.events = []
  setup.normalModes = ['CAS']
  setup.upstream = [SECONDARIES.get(line.tag)!]
}

/** Changes of product and gaps in the tile feed reach all zones of a kiln, all loops of a dryer, at the same time. */
function commonUpsets(line: DemoLine, scenario: LoopScenario): void {
  const kiln = line.unit.startsWith('Roller kiln') && line.type === 'temperature'
  if (!kiln && !line.unit.startsWith('Tile dryer')) return
  const common = seededRandom(mixSeed(SEED, 5000 + [...line.unit].reduce((sum, c) => sum + c.charCodeAt(0), 0)))
  const own = seededRandom(mixSeed(SEED, 6000 + INDEX.get(line.tag)!))
  const gaps = Array.from({ length: 26 }, () => Math.round(STORY_DAYS * DAY * common.uniform())).sort((a, b) => a - b)
  scenario.loads.push({ kind: 'pulses', at: gaps, widthS: 900 + 900 * common.uniform(), size: (kiln ? 2.2 : 1.5) * (0.4 + own.uniform()), recoveryS: 300 })
}
