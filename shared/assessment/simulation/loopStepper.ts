import type { LoopSetup } from '../types'
import { noiseSource } from './noiseSource'
import { createDeadBand } from '../valve/models/deadBand'
import { createKanoStiction } from '../valve/models/kanoStiction'
import { createChoudhuryStiction } from '../valve/models/choudhuryStiction'
import { createHeStiction } from '../valve/models/heStiction'
import { mixSeed } from './mixSeed'
import { idealTuning } from './idealTuning'
import type { LoopScenario, SensorFault, SimulatedValve, SimulationEvent, Tuning } from './scenario'

const KELVIN = 273.15

/**
 * One closed loop, advanced by fixed steps: measure, control, move the valve, let the process run on to the next step.
 *
 * The linear processes are exact for an output held over the step, with any dead time (the fraction of a step included);
 * the furnace uses Euler steps on its heat balance. The controller is a positional PID in the ideal form (series and
 * parallel settings converted), derivative on the filtered measurement, integral stopped while the output is limited and
 * pushed further; or two-position control with a band.
 * Source: K. J. Åström, B. Wittenmark (1997) Computer-Controlled Systems, 3rd ed., 3.2 (sampling with dead time), 8.6
 * (digital PID); common practice for the rest.
 */
export class LoopStepper {
  /** measured value, output, stem position and mode (0 AUTO, 1 MAN, 2 CAS) of the current step */
  pv = 0
  op = 0
  stem = 0
  mode = 0
  recording = true
  /** true process value at the current step, PV unit */
  truePv = 0

  private readonly dt: number
  private readonly random: ReturnType<typeof noiseSource>
  private readonly noise: number
  private readonly resolution: number
  private readonly pvFloor: number
  private readonly pvCeiling: number
  private readonly opLow: number
  private readonly opHigh: number
  private readonly sign: number
  private readonly onOff: boolean
  private readonly normalMode: number
  private readonly restOp: number
  private readonly restPv: number
  private readonly setup: LoopSetup
  private tuning: Required<Tuning>

  // process
  private readonly kind: 0 | 1 | 2 | 3
  private readonly ring: Float64Array
  private readonly mask: number
  private readonly delaySteps: number
  private gain1 = 0
  private keep1 = 0
  private new1 = 0
  private old1 = 0
  private gain2 = 0
  private keep2 = 0
  private new2 = 0
  private old2 = 0
  private x1 = 0
  private x2 = 0
  private lossLinear = 0
  private lossRadiation = 0
  private ambient = 0
  private capacity = 1
  private sensorKeep = 0
  private integratorLow = -Infinity
  private integratorHigh = Infinity

  // controller
  private kc = 0
  private integralStep = 0
  private derivativeGain = 0
  private derivativeKeep = 0
  private filterKeep = 0
  private weight = 1
  private band = 0
  private integral = 0
  private filtered = 0
  private derivative = 0
  private lastFiltered = 0
  private started = false

  // valve, sensor, operator
  private move: ((u: number) => number) | null = null
  private fault: SensorFault | null = null
  private frozenAt = 0
  private nudgeSteps = 0
  private shut = false
  private step = 0

  constructor(setup: LoopSetup, scenario: LoopScenario) {
    this.setup = setup
    const dt = this.dt = scenario.stepS
    if (!(dt > 0)) throw new RangeError(`stepS must be > 0, got ${dt}`)
    this.random = noiseSource(mixSeed(scenario.seed, 1))
    this.noise = scenario.noise
    this.resolution = scenario.resolution
    const span = setup.pvHigh - setup.pvLow
    // a 4-20 mA transmitter goes on a little beyond its range (3.8 and 20.5 mA)
    this.pvFloor = setup.pvLow - 0.0125 * span
    this.pvCeiling = setup.pvHigh + 0.03125 * span
    this.opLow = setup.opLow
    this.opHigh = setup.opHigh
    this.sign = setup.action === 'direct' ? -1 : 1
    this.onOff = setup.form === 'onOff'
    this.normalMode = scenario.cascade ? 2 : 0
    this.mode = this.normalMode
    const { pv: restPv, op: restOp } = scenario.workingPoint
    this.restPv = restPv
    this.restOp = restOp
    this.op = this.stem = this.integral = restOp
    this.truePv = restPv

    const process = scenario.process
    const steps = process.deadTime / dt
    this.delaySteps = Math.floor(steps + 1e-9)
    const fraction = Math.max(0, steps - this.delaySteps) * dt
    let size = 1
    while (size < this.delaySteps + 2) size *= 2
    this.ring = new Float64Array(size).fill(restOp)
    this.mask = size - 1
    const lag = (tau: number) => ({ keep: Math.exp(-dt / tau), old: Math.exp(-(dt - fraction) / tau) - Math.exp(-dt / tau), fresh: 1 - Math.exp(-(dt - fraction) / tau) })
    if (process.kind === 'integrating') {
      this.kind = 2
      this.gain1 = process.processGain
      this.old1 = fraction
      this.new1 = dt - fraction
      // a vessel neither empties below its bottom nor fills above its top
      this.integratorLow = setup.pvLow - restPv
      this.integratorHigh = setup.pvHigh - restPv
    }
    else if (process.kind === 'furnace') {
      this.kind = 3
      this.old1 = fraction / dt
      this.new1 = 1 - fraction / dt
      this.x1 = this.x2 = restPv
      this.ambient = process.ambient
      const hot = (restPv + KELVIN) ** 4 - (process.ambient + KELVIN) ** 4
      this.lossLinear = restOp * (1 - process.radiationShare) / (restPv - process.ambient)
      this.lossRadiation = restOp * process.radiationShare / hot
      this.capacity = process.timeConstant * (this.lossLinear + this.lossRadiation * 4 * (restPv + KELVIN) ** 3)
      this.sensorKeep = process.sensorLag > 0 ? Math.exp(-dt / process.sensorLag) : 0
    }
    else {
      const one = process.timeConstant
      let two = process.kind === 'sopdt' ? process.timeConstant2 : 0
      if (two > 0 && Math.abs(one - two) < 1e-4 * one) two = one * (1 - 1e-4)
      const first = lag(one)
      this.keep1 = first.keep
      this.old1 = first.old
      this.new1 = first.fresh
      this.kind = two > 0 ? 1 : 0
      this.gain1 = process.processGain * (two > 0 ? one / (one - two) : 1)
      if (two > 0) {
        const second = lag(two)
        this.keep2 = second.keep
        this.old2 = second.old
        this.new2 = second.fresh
        this.gain2 = -process.processGain * two / (one - two)
      }
    }
    this.tuning = {
      gain: setup.gain ?? 1, integralTimeS: setup.integralTimeS, derivativeTimeS: setup.derivativeTimeS,
      filterTimeS: setup.filterTimeS, setpointWeight: setup.setpointWeight, hysteresis: setup.hysteresis,
    }
    this.tune({})
    this.setValve(scenario.valve)
  }

  private tune(change: Tuning): void {
    const dt = this.dt
    this.tuning = { ...this.tuning, ...change }
    const { gain, integralTimeS, derivativeTimeS, filterTimeS, setpointWeight, hysteresis } = this.tuning
    const ideal = idealTuning(this.setup.form, gain, integralTimeS, derivativeTimeS)
    this.kc = ideal.controllerGain * (this.opHigh - this.opLow) / (this.setup.pvHigh - this.setup.pvLow)
    this.integralStep = this.kc * dt / ideal.integralTime
    const filter = ideal.derivativeTime / 10
    this.derivativeKeep = filter / (filter + dt)
    this.derivativeGain = this.kc * ideal.derivativeTime / (filter + dt)
    this.filterKeep = filterTimeS ? Math.exp(-dt / filterTimeS) : 0
    this.weight = setpointWeight ?? 1
    this.band = (hysteresis ?? 0) / 2
  }

  private setValve(valve: SimulatedValve): void {
    const initial = this.stem
    if (valve.kind === 'sound') this.move = null
    else if (valve.kind === 'deadBand') this.move = createDeadBand({ width: valve.width, initial })
    else {
      const create = valve.model === 'kano' ? createKanoStiction : valve.model === 'he' ? createHeStiction : createChoudhuryStiction
      this.move = create({ stickBand: valve.stickBand, slipJump: valve.slipJump, initial })
    }
  }

  /** Something happens before the current step is measured. */
  handle(event: SimulationEvent): void {
    switch (event.kind) {
      case 'tuning': {
        const proportional = this.kc
        this.tune(event.tuning)
        // bumpless: the integral takes up what the proportional part loses or gains
        this.integral += (proportional - this.kc) * this.lastProportional
        return
      }
      case 'valve': this.setValve(event.valve); return
      case 'manual':
        this.mode = 1
        if (event.op !== null) this.op = event.op
        this.nudgeSteps = event.nudgeEveryS > 0 ? Math.max(1, Math.round(event.nudgeEveryS / this.dt)) : 0
        return
      case 'automatic': this.mode = this.normalMode; this.started = false; return
      case 'sensor': this.fault = event.fault; this.frozenAt = this.pv; return
      case 'shutDown': this.shut = true; this.mode = 1; this.op = this.opLow; this.nudgeSteps = 0; return
      case 'startUp': this.shut = false; this.mode = this.normalMode; this.started = false; return
      case 'historian': this.recording = event.recording
    }
  }

  private lastProportional = 0

  private measure(): void {
    let y = this.truePv
    if (this.noise > 0) y += this.noise * this.random.normal()
    const fault = this.fault
    if (fault !== null) {
      if (fault.kind === 'frozen') y = this.frozenAt
      else if (fault.kind === 'noisy') y += fault.standardDeviation * this.random.normal()
      else if (fault.kind === 'spiky') { if (this.random.uniform() < fault.probability) y += fault.height * (0.5 + this.random.uniform()) }
      else if (fault.kind === 'burnout') y += (fault.value - y)
      else y = NaN
    }
    if (this.resolution > 0) y = Math.round(y / this.resolution) * this.resolution
    if (fault === null || fault.kind !== 'burnout') y = y < this.pvFloor ? this.pvFloor : y > this.pvCeiling ? this.pvCeiling : y
    this.pv = y
  }

  /** Measures and controls; `actuate` must follow. */
  control(sp: number): void {
    this.measure()
    const y = this.pv
    if (!(y === y)) return // no measurement: the controller holds its output
    if (this.onOff) {
      if (this.mode !== 1) {
        const e = this.sign * (sp - y)
        if (e >= this.band || (!this.started && e > -this.band)) this.op = this.opHigh
        else if (e <= -this.band) this.op = this.opLow
        this.started = true
      }
      return
    }
    if (!this.started) this.filtered = y
    this.filtered += (1 - this.filterKeep) * (y - this.filtered)
    const yf = this.filtered
    if (!this.started) { this.derivative = 0; this.lastFiltered = yf }
    this.derivative = this.derivativeKeep * this.derivative - this.derivativeGain * this.sign * (yf - this.lastFiltered)
    this.lastFiltered = yf
    const error = this.sign * (sp - yf)
    const pd = this.kc * this.sign * (this.weight * sp - yf) + this.derivative
    this.lastProportional = this.sign * (this.weight * sp - yf)
    if (this.mode === 1) {
      if (this.nudgeSteps > 0 && this.step % this.nudgeSteps === 0 && !this.shut) {
        const span = this.opHigh - this.opLow
        const wish = 0.5 * this.kc * error
        this.op = this.limit(Math.round(this.op + Math.max(-0.05 * span, Math.min(0.05 * span, wish))))
      }
      this.integral = this.op - pd
      this.started = true
      return
    }
    if (this.integralStep === 0) {
      // without integral action the output rests at its bias when there is no error
      this.op = this.limit(this.restOp + this.kc * error + this.derivative)
      this.started = true
      return
    }
    if (!this.started) { this.integral = this.op - pd; this.started = true }
    let out = pd + this.integral
    const windsUp = (out >= this.opHigh && error > 0) || (out <= this.opLow && error < 0)
    if (!windsUp) {
      this.integral += this.integralStep * error
      out += this.integralStep * error
    }
    this.op = this.limit(out)
  }

  private limit(u: number): number {
    return u > this.opHigh ? this.opHigh : u < this.opLow ? this.opLow : u
  }

  /** Moves the valve to `op` (or, in a cascade, the final element to what the inner loop delivers). */
  actuate(): void {
    this.stem = this.move === null ? this.op : this.limit(this.move(this.op))
  }

  /** Runs the process to the next step with a load at its input. */
  advance(load: number): void {
    const { ring, mask, step } = this
    ring[step & mask] = this.stem
    const at = step - this.delaySteps
    const fresh = ring[at & mask] - this.restOp
    const old = ring[(at - 1) & mask] - this.restOp
    if (this.shut) load = this.kind === 2 ? -fresh : 0
    if (this.kind === 2) {
      let x = this.x1 + this.gain1 * (this.old1 * old + this.new1 * fresh + (this.old1 + this.new1) * load)
      x = x < this.integratorLow ? this.integratorLow : x > this.integratorHigh ? this.integratorHigh : x
      this.x1 = x
      this.truePv = this.restPv + x
    }
    else if (this.kind === 3) {
      const heat = this.restOp + this.old1 * old + this.new1 * fresh + load
      const kelvin = this.x1 + KELVIN
      const cold = this.ambient + KELVIN
      const loss = this.lossLinear * (this.x1 - this.ambient) + this.lossRadiation * (kelvin * kelvin * kelvin * kelvin - cold * cold * cold * cold)
      this.x1 += this.dt * (heat - loss) / this.capacity
      this.x2 = this.sensorKeep * this.x2 + (1 - this.sensorKeep) * this.x1
      this.truePv = this.x2
    }
    else {
      this.x1 = this.keep1 * this.x1 + this.old1 * old + this.new1 * fresh + (this.old1 + this.new1) * load
      let y = this.gain1 * this.x1
      if (this.kind === 1) {
        this.x2 = this.keep2 * this.x2 + this.old2 * old + this.new2 * fresh + (this.old2 + this.new2) * load
        y += this.gain2 * this.x2
      }
      this.truePv = this.restPv + y
    }
    this.step = step + 1
  }
}
