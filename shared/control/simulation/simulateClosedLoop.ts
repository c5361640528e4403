import type { IdealPid, ProcessModel } from '../types'
import { stickingValve } from './stickingValve'

/** Something that hits the process from outside. */
export interface Upset {
  /** s */
  at: number
  /** s; left out: it stays. */
  until?: number
  /** OP unit where it enters at the input, PV unit where it enters at the output. */
  size: number
  /** `input` goes through the process as OP does; `output` shows in PV without dead time (a door lets cold air in). */
  enters?: 'input' | 'output'
  /** s, first-order lag of an upset at the output. */
  lagTime?: number
}

export interface ClosedLoopCase {
  model: ProcessModel
  controller: IdealPid
  /** s */
  horizon: number
  /** s; left out: fine enough for the fastest time of the loop, at most `maximumSteps`. */
  step?: number
  /** 20,000 when left out. */
  maximumSteps?: number
  setpoint?: { at: number, size: number }
  /** s, first-order filter on the set point; 0 when left out. */
  setpointFilterTime?: number
  upsets?: Upset[]
  /** Further upset at the process input as a function of time, OP unit (for coloured disturbances). */
  load?: (time: number) => number
  /** Rest before time 0: PV = SP and OP; 0 when left out. */
  start?: { pv: number, op: number }
  outputLimits?: { low: number, high: number }
  noise?: { standardDeviation: number, /** s between samples */ interval: number, /** standard normal, seeded */ normal: () => number }
  /** Stiction of the valve, OP unit: stick band S and slip jump J <= S (Kano 2004). */
  valve?: { stickBand: number, slipJump: number }
  /** s; OP moves in manual instead of the controller's output, as a function of time. */
  manualOutput?: (time: number) => number
}

export interface ClosedLoopResponse {
  /** s, evenly spaced from 0 */
  time: Float64Array
  /** PV without measurement noise */
  pv: Float64Array
  /** PV as measured */
  measured: Float64Array
  sp: Float64Array
  op: Float64Array
}

/**
 * Simulates a loop: PID in the ideal form, back-calculation against wind-up (tracking time sqrt(Ti Td), or Ti without
 * derivative action), dead time as a whole number of steps, first-order parts by their exact first-order-hold
 * discretisation, integral by the trapezoid rule. Cost: about 50 ns a step.
 * @throws RangeError when a time is negative, the horizon not positive or the limits crossed
 * Source: Åström, Hägglund (2006) Advanced PID Control (controller, anti-windup); Åström, Wittenmark, Computer-Controlled Systems (hold).
 * Fixture: fixtures/reference/tuning.json (IAE, overshoot), fixtures/reference/twoDegreeOfFreedom.json.
 */
export function simulateClosedLoop(loop: ClosedLoopCase): ClosedLoopResponse {
  const { model, controller, horizon, setpoint, setpointFilterTime = 0, upsets = [], load, noise, manualOutput } = loop
  const { controllerGain, integralTime, derivativeTime, setpointWeight = 1, derivativeFilterFactor = 10, measurementFilterTime = 0 } = controller
  const { pv: pv0, op: op0 } = loop.start ?? { pv: 0, op: 0 }
  const { low, high } = loop.outputLimits ?? { low: -Infinity, high: Infinity }
  if (!(horizon > 0)) throw new RangeError(`simulateClosedLoop: the horizon must be positive, got ${horizon}`)
  if (!(low < high)) throw new RangeError(`simulateClosedLoop: the output limits are crossed, got ${low}, ${high}`)
  if (!(integralTime > 0) || !(derivativeTime >= 0) || !(measurementFilterTime >= 0) || !(setpointFilterTime >= 0)) throw new RangeError('simulateClosedLoop: a time of the controller is negative or not a number')
  const { step: h, delaySteps } = chooseStep(loop)
  const n = Math.floor(horizon / h + 1e-9)

  const time = new Float64Array(n + 1)
  const pv = new Float64Array(n + 1)
  const measured = new Float64Array(n + 1)
  const sp = new Float64Array(n + 1)
  const op = new Float64Array(n + 1)
  /** What reaches the process, valve and load included, as deviation from rest. */
  const input = new Float64Array(n + 1)
  /** The same just before a step of the set point, whose kick must not look like a ramp over the step before. */
  let inputBeforeKick = 0

  // First-order hold of x' = (K u - x)/tau over one step: x+ = f x + K (g0 u0 + g1 u1).
  const [fa, ga0, ga1] = model.kind === 'integrating' ? [1, h / 2, h / 2] : hold(model.timeConstant, h)
  // Two lags in series: what the second one gets over a step is not a ramp, so it needs its own coefficients.
  const cross = model.kind === 'sopdt' && model.timeConstant2 > 0 ? secondLag(model.timeConstant, model.timeConstant2, h) : null
  const [ff, gf0, gf1] = measurementFilterTime > 0 ? hold(measurementFilterTime, h) : [0, 0, 1]
  const derivativeLag = derivativeTime / derivativeFilterFactor
  const [fd, gd0, gd1] = derivativeLag > 0 ? hold(derivativeLag, h) : [0, 0, 1]
  const fs = setpointFilterTime > 0 ? Math.exp(-h / setpointFilterTime) : 0
  const reset = integralTime === Infinity ? 0 : h / integralTime
  const tracking = integralTime === Infinity ? 0 : h / Math.max(h, derivativeTime > 0 ? Math.sqrt(integralTime * derivativeTime) : integralTime)
  const valve = loop.valve && loop.valve.stickBand > 0 ? stickingValve(loop.valve.stickBand, loop.valve.slipJump, op0) : null

  // A change falls on the nearest step, so that it is a jump and not a ramp of one step.
  const setpointStep = setpoint ? Math.round(setpoint.at / h) : Infinity
  const inputUpsets = upsets.filter(u => (u.enters ?? 'input') === 'input').map(u => ({ from: Math.round(u.at / h), to: u.until === undefined ? Infinity : Math.round(u.until / h), size: u.size }))
  const outputUpsets = upsets.filter(u => u.enters === 'output').map(u => ({ from: Math.round(u.at / h), to: u.until === undefined ? Infinity : Math.round(u.until / h), size: u.size, f: u.lagTime && u.lagTime > 0 ? Math.exp(-h / u.lagTime) : 0, state: 0 }))
  const noiseEvery = noise ? Math.max(1, Math.round(noise.interval / h)) : 0

  let x1 = 0
  let x2 = 0
  let filtered = 0
  let derivativeState = 0
  let integral = 0
  let reference = 0
  let noiseNow = 0
  let errorBefore = 0
  let targetBefore = 0
  for (let k = 0; k <= n; k++) {
    time[k] = k * h
    if (k > 0) {
      const j = k - delaySteps
      let u0 = 0
      let u1 = 0
      if (delaySteps > 0) {
        if (j >= 1) {
          u0 = input[j - 1]
          u1 = j === setpointStep ? inputBeforeKick : input[j]
        }
      }
      // Without dead time the output of this step is not known yet: hold the last one.
      else u0 = u1 = input[k - 1]
      for (const upset of inputUpsets) {
        // Upsets at the input suffer the dead time as OP does.
        if (k - 1 - delaySteps >= upset.from && k - 1 - delaySteps < upset.to) {
          u0 += upset.size
          u1 += upset.size
        }
      }
      const w0 = model.processGain * u0
      const w1 = model.processGain * u1
      if (cross) x2 = cross.own * x2 + cross.first * x1 + cross.c0 * w0 + cross.c1 * w1
      x1 = fa * x1 + ga0 * w0 + ga1 * w1
    }
    let y = cross ? x2 : x1
    for (const upset of outputUpsets) {
      const target = k >= upset.from && k < upset.to ? upset.size : 0
      upset.state = target + upset.f * (upset.state - target)
      y += upset.state
    }
    if (noise && k % noiseEvery === 0) noiseNow = noise.standardDeviation * noise.normal()
    const seen = y + noiseNow
    const target = setpoint && k >= setpointStep ? setpoint.size : 0
    const referenceBefore = reference
    // With a filter the step acts over the interval that follows it; without one, at once.
    if (fs === 0) reference = target
    else if (k > 0) reference = targetBefore + fs * (reference - targetBefore)
    targetBefore = target
    const previousFiltered = filtered
    filtered = measurementFilterTime > 0 ? (k === 0 ? 0 : ff * filtered + gf0 * (measured[k - 1] - pv0) + gf1 * seen) : seen
    derivativeState = derivativeLag > 0 ? fd * derivativeState + gd0 * previousFiltered + gd1 * filtered : filtered
    const controlError = reference - filtered
    const kicked = k === setpointStep && fs === 0
    if (k > 0) integral += reset * ((kicked ? referenceBefore - filtered : controlError) + errorBefore) / 2
    errorBefore = controlError
    const derivative = derivativeTime === 0 ? 0 : derivativeLag > 0 ? (filtered - derivativeState) / derivativeLag * derivativeTime : k === 0 ? 0 : derivativeTime * (filtered - previousFiltered) / h
    let output = op0 + controllerGain * (setpointWeight * reference - filtered + integral - derivative)
    if (manualOutput) output = manualOutput(time[k])
    const limited = output < low ? low : output > high ? high : output
    // Back-calculation: the integral part follows the output while it stands at a limit.
    if (limited !== output && !manualOutput) integral += tracking * (limited - output) / controllerGain
    pv[k] = pv0 + y
    measured[k] = pv0 + seen
    sp[k] = pv0 + target
    op[k] = limited
    const extra = load ? load(time[k]) : 0
    if (kicked) inputBeforeKick = (valve || manualOutput ? input[Math.max(0, k - 1)] : Math.min(high, Math.max(low, output - controllerGain * setpointWeight * (reference - referenceBefore))) - op0 + extra)
    input[k] = (valve ? valve(limited) : limited) - op0 + extra
  }
  return { time, pv, measured, sp, op }
}

/** Coefficients of the exact first-order hold of a unit-gain lag. */
function hold(lag: number, h: number): [number, number, number] {
  const f = Math.exp(-h / lag)
  // -expm1 keeps the digits when the step is a tiny part of the lag.
  const mean = -Math.expm1(-h / lag) * lag / h
  return [f, mean - f, 1 - mean]
}

/** Second lag driven by the first one over one step, the input of the first ramping from w0 to w1; by Gauss-Legendre quadrature, exact to rounding for steps below the lags. */
function secondLag(lag1: number, lag2: number, h: number): { own: number, first: number, c0: number, c1: number } {
  const nodes = [-0.906179845938664, -0.538469310105683, 0, 0.538469310105683, 0.906179845938664]
  const weights = [0.236926885056189, 0.478628670499366, 0.568888888888889, 0.478628670499366, 0.236926885056189]
  let first = 0
  let c0 = 0
  let c1 = 0
  for (let i = 0; i < 5; i++) {
    const s = (nodes[i] + 1) / 2 * h
    const weight = weights[i] / 2 * h / lag2 * Math.exp(-(h - s) / lag2)
    const f = Math.exp(-s / lag1)
    const mean = s > 0 ? -Math.expm1(-s / lag1) * lag1 / s : 1
    // First lag at s: f x1 + (1 - f) w0 + (1 - mean) s/h (w1 - w0), the exact answer to the ramp.
    const reachesStart = 1 - f
    const reachesSlope = (1 - mean) * s / h
    first += weight * f
    c0 += weight * (reachesStart - reachesSlope)
    c1 += weight * reachesSlope
  }
  return { own: Math.exp(-h / lag2), first, c0, c1 }
}

function chooseStep({ model, controller, horizon, step, maximumSteps = 20_000, setpointFilterTime = 0 }: ClosedLoopCase): { step: number, delaySteps: number } {
  const lags = model.kind === 'integrating' ? [] : model.kind === 'fopdt' ? [model.timeConstant] : [model.timeConstant, model.timeConstant2]
  if (!(model.deadTime >= 0) || lags.some(lag => !(lag >= 0))) throw new RangeError('simulateClosedLoop: a time of the model is negative or not a number')
  const derivativeLag = controller.derivativeTime / (controller.derivativeFilterFactor ?? 10)
  const wanted = step ?? Math.max(horizon / maximumSteps, Math.min(
    ...[...lags, model.deadTime, controller.integralTime, setpointFilterTime, controller.measurementFilterTime ?? 0].filter(t => t > 0).map(t => t / 60),
    ...(derivativeLag > 0 && derivativeLag < Infinity ? [derivativeLag / 3] : []), horizon / 500))
  if (!(wanted > 0)) throw new RangeError(`simulateClosedLoop: the step must be positive, got ${wanted}`)
  if (model.deadTime === 0) return { step: wanted, delaySteps: 0 }
  // A step given stays as it is and the dead time is rounded to it; else the step is made to divide the dead time.
  if (step !== undefined || model.deadTime < wanted) return { step: wanted, delaySteps: Math.max(1, Math.round(model.deadTime / wanted)) }
  const delaySteps = Math.ceil(model.deadTime / wanted - 1e-9)
  return { step: model.deadTime / delaySteps, delaySteps }
}
