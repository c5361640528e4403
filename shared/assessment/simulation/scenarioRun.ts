import type { LoopSetup } from '../types'
import { addLoad } from './addLoad'
import { compressTrend } from './compressTrend'
import { fillSetpoint } from './fillSetpoint'
import { LoopStepper } from './loopStepper'
import { CAUSE_VERDICT, MODE_NAMES, type LoopScenario, type SimulatedLoop, type SimulationEvent } from './scenario'

/** Programme and load of each step: large, so kept between calls; fresh memory costs more than the simulation itself. */
const scratch: { sp: Float64Array, load: Float64Array }[] = []

function buffers(slot: number, n: number) {
  let pair = scratch[slot]
  if (!pair || pair.sp.length < n) pair = scratch[slot] = { sp: new Float64Array(n), load: new Float64Array(n) }
  return { sp: pair.sp.subarray(0, n), load: pair.load.subarray(0, n).fill(0) }
}

/**
 * A scenario on its way: the stepper, what acts on it, and the samples taken so far. Internal to the simulators; at most
 * one run per slot at a time, because the slot's buffers are shared between runs.
 */
export class ScenarioRun {
  readonly stepper: LoopStepper
  readonly sp: Float64Array
  readonly load: Float64Array
  readonly steps: number
  private readonly stride: number
  private readonly events: SimulationEvent[]
  private next = 0
  private readonly t: Float64Array
  private readonly outPv: Float64Array
  private readonly outSp: Float64Array
  private readonly outOp: Float64Array
  private readonly outMode: Uint8Array
  private readonly outStem: Float64Array | null

  constructor(readonly setup: LoopSetup, readonly scenario: LoopScenario, slot: number, withStem: boolean) {
    const { intervalS, stepS, durationS, startMs } = scenario
    this.stride = Math.round(intervalS / stepS)
    if (this.stride < 1 || Math.abs(this.stride * stepS - intervalS) > 1e-6 * intervalS)
      throw new RangeError(`stepS must divide intervalS, got ${stepS} s and ${intervalS} s`)
    const n = Math.floor(durationS / intervalS + 1e-9)
    if (!(n >= 1)) throw new RangeError(`durationS must hold at least one sample, got ${durationS} s at ${intervalS} s`)
    this.steps = n * this.stride
    const pair = buffers(slot, this.steps)
    this.sp = pair.sp
    this.load = pair.load
    fillSetpoint(scenario.setpoint, this.sp, stepS)
    for (const part of scenario.loads) addLoad(part, this.load, stepS)
    this.events = [...scenario.events].sort((a, b) => a.at - b.at)
    this.stepper = new LoopStepper(setup, scenario)
    this.t = new Float64Array(n)
    for (let i = 0; i < n; i++) this.t[i] = startMs + Math.round(i * intervalS * 1000)
    this.outPv = new Float64Array(n)
    this.outSp = new Float64Array(n)
    this.outOp = new Float64Array(n)
    this.outMode = new Uint8Array(n)
    this.outStem = withStem ? new Float64Array(n) : null
  }

  /** First step at or after `k` at which something happens, or the end. */
  nextEventStep(): number {
    return this.next < this.events.length ? Math.min(this.steps, Math.ceil(this.events[this.next].at / this.scenario.stepS - 1e-9)) : this.steps
  }

  handleEvents(k: number): void {
    while (this.next < this.events.length && this.events[this.next].at <= k * this.scenario.stepS + 1e-9) this.stepper.handle(this.events[this.next++])
  }

  sample(k: number): void {
    if (k % this.stride !== 0) return
    const i = k / this.stride
    const { stepper } = this
    if (stepper.recording) {
      this.outPv[i] = stepper.pv
      this.outSp[i] = this.sp[k]
      this.outOp[i] = stepper.op
      this.outMode[i] = stepper.mode
    }
    else {
      this.outPv[i] = this.outSp[i] = this.outOp[i] = NaN
      this.outMode[i] = 255
    }
    if (this.outStem) this.outStem[i] = stepper.stem
  }

  finish(): SimulatedLoop {
    const { scenario, setup } = this
    const { pv: pvDecimals, sp: spDecimals, op: opDecimals } = scenario.decimals
    const record = { t: this.t, pv: this.outPv, sp: this.outSp, op: this.outOp, mode: this.outMode, modeNames: MODE_NAMES }
    let kept: Uint8Array | null = null
    if (scenario.compression) {
      const { technique, pvDeviation, opDeviation, longestS, report } = scenario.compression
      const seconds = this.t.map(x => (x - scenario.startMs) / 1000)
      const pvKept = compressTrend(technique, seconds, record.pv, pvDeviation, longestS)
      const opKept = compressTrend(technique, seconds, record.op, opDeviation, longestS)
      interpolate(record.pv, pvKept)
      interpolate(record.op, opKept)
      if (report === 'archived') kept = pvKept.map((x, i) => x | opKept[i])
    }
    round(record.pv, pvDecimals)
    round(record.sp, spDecimals)
    round(record.op, opDecimals)
    const only = <T extends Float64Array | Uint8Array>(x: T): T => kept === null ? x : x.filter((_, i) => kept[i] === 1) as T
    const ms = (s: number) => scenario.startMs + Math.round(s * 1000)
    return {
      record: { t: only(record.t), pv: only(record.pv), sp: only(record.sp), op: only(record.op), mode: only(record.mode), modeNames: MODE_NAMES },
      truth: {
        tag: setup.tag, cause: scenario.truth.cause, verdict: CAUSE_VERDICT[scenario.truth.cause],
        spans: scenario.truth.spans.map(({ fromS, toS }) => ({ fromMs: ms(fromS), toMs: ms(toS) })),
        facts: scenario.truth.facts, process: scenario.process, valve: scenario.valve,
      },
      stem: this.outStem === null ? null : only(this.outStem),
    }
  }
}

function round(x: Float64Array, decimals: number): void {
  const scale = 10 ** decimals
  for (let i = 0; i < x.length; i++) x[i] = Math.round(x[i] * scale) / scale
}

function interpolate(x: Float64Array, kept: Uint8Array): void {
  let from = 0
  for (let i = 1; i < x.length; i++) {
    if (kept[i] === 0) continue
    for (let j = from + 1; j < i; j++) x[j] = x[from] + (x[i] - x[from]) * (j - from) / (i - from)
    from = i
  }
}
