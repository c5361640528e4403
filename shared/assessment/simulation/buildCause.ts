import { compressTrend } from './compressTrend'
import type { Cause, LoadPart, ScenarioTruth, Span } from './scenario'
import { Redraw, calm, marginOf, movingSetpoint, ordinaryEvents, peakOf, pieceOf, randomSteps, requireVisible, trial, type Draft, type DrawOptions } from './draft'

const HOUR = 3600

/** Builds a cause into a draft that is still at rest, large enough to be seen. @throws Redraw where this draft cannot show it */
export function buildCause(cause: Cause, draft: Draft, options: DrawOptions): void {
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
      buildCause(base, draft, { ...options, partial: false })
      truth.facts = { ...scenario.truth.facts, hidden: base }
      scenario.truth = truth
      compress(draft)
    }
  }
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
