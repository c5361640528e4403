import type { IdealPid, ProcessModel } from '../types'
import { frequencyResponse } from './frequencyResponse'

export interface Margins {
  /** Largest sensitivity, max |1 / (1 + L)|; Infinity when the loop is not stable. */
  maximumSensitivity: number
  /** Largest complementary sensitivity, max |L / (1 + L)|. */
  maximumComplementarySensitivity: number
  /** Factor by which the gain may grow; Infinity when the phase never crosses. */
  gainMargin: number
  /** Degrees; Infinity when the gain never crosses 1. */
  phaseMarginDeg: number
  /** s of dead time that may be added; Infinity when the gain never crosses 1. */
  delayMargin: number
  /** rad/s where the phase first crosses -180 degrees / where the gain crosses 1; null when it does not. */
  phaseCrossover: number | null
  gainCrossover: number | null
  /** By the Nyquist criterion in its simple form: all gain margins above 1 and all phase margins positive, controller acting the right way. */
  stable: boolean
}

/**
 * Margins of a loop, dead time exact. About 1,500 evaluations, then each crossing and peak is refined; the grid is
 * logarithmic below one radian of dead time and linear above, because the phase turns evenly there.
 * @param model, controller in units that belong together (process gain x controller gain without dimension; per s for integrating)
 * @throws RangeError when the controller gain or the process gain is 0 or NaN, or a time negative
 * Source: definitions, e.g. Åström, Murray, Feedback Systems; Skogestad (2003), table of margins.
 * Fixture: fixtures/reference/tuning.json.
 */
export function margins(model: ProcessModel, controller: IdealPid): Margins {
  const loopGain = model.processGain * controller.controllerGain
  if (!loopGain) throw new RangeError(`margins: process and controller gain must be numbers other than 0, got ${model.processGain}, ${controller.controllerGain}`)
  const lags = model.kind === 'integrating' ? [] : model.kind === 'fopdt' ? [model.timeConstant] : [model.timeConstant, model.timeConstant2]
  if ([model.deadTime, ...lags, controller.integralTime, controller.derivativeTime].some(time => !(time >= 0))) throw new RangeError('margins: a time is negative or not a number')
  const L = (w: number) => frequencyResponse(model, controller, w)
  const grid = frequencies(model, controller)
  const n = grid.length
  const magnitude = new Float64Array(n)
  const phase = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    const point = L(grid[i])
    magnitude[i] = point.magnitude
    phase[i] = point.phase
  }

  let gainMargin = Infinity
  let phaseMargin = Infinity
  let delayMargin = Infinity
  let phaseCrossover: number | null = null
  let gainCrossover: number | null = null
  const turn = 2 * Math.PI
  for (let i = 0; i + 1 < n; i++) {
    if (magnitude[i] >= 1 !== magnitude[i + 1] >= 1) {
      const w = root(x => L(x).magnitude >= 1 ? 1 : -1, grid[i], grid[i + 1])
      const above = L(w).phase + Math.PI
      const wrapped = above - turn * Math.round(above / turn)
      if (wrapped < phaseMargin) {
        phaseMargin = wrapped
        gainCrossover = w
      }
      delayMargin = Math.min(delayMargin, (above - turn * Math.floor(above / turn)) / w)
    }
    // Crossings of -pi, -3 pi, ...: count how many odd multiples lie between the two phases.
    const before = Math.floor((phase[i] + Math.PI) / turn)
    const after = Math.floor((phase[i + 1] + Math.PI) / turn)
    if (before !== after) {
      const target = Math.max(before, after) * turn - Math.PI
      const w = root(x => L(x).phase - target, grid[i], grid[i + 1])
      const margin = 1 / L(w).magnitude
      if (margin < gainMargin) {
        gainMargin = margin
        phaseCrossover = w
      }
    }
  }
  const sensitivity = (w: number) => {
    const p = L(w)
    return 1 / Math.hypot(1 + p.magnitude * Math.cos(p.phase), p.magnitude * Math.sin(p.phase))
  }
  const complementary = (w: number) => sensitivity(w) * L(w).magnitude
  const stable = loopGain > 0 && gainMargin > 1 && phaseMargin > 0
  return {
    maximumSensitivity: stable ? peak(sensitivity, grid) : Infinity,
    maximumComplementarySensitivity: stable ? peak(complementary, grid) : Infinity,
    gainMargin, phaseMarginDeg: phaseMargin * 180 / Math.PI, delayMargin, phaseCrossover, gainCrossover, stable,
  }
}

function frequencies(model: ProcessModel, { controllerGain, integralTime, derivativeTime, measurementFilterTime = 0 }: IdealPid): Float64Array {
  const lags = model.kind === 'integrating' ? [] : model.kind === 'fopdt' ? [model.timeConstant] : [model.timeConstant, model.timeConstant2]
  const times = [model.deadTime, ...lags, integralTime, derivativeTime, measurementFilterTime, model.kind === 'integrating' ? 1 / Math.abs(model.processGain * controllerGain) : 0].filter(t => t > 0 && t < Infinity)
  const longest = Math.max(...times)
  const delay = model.deadTime > 0 ? model.deadTime : Math.min(...times) / 100
  const points: number[] = []
  const low = Math.min(1e-3 / longest, 1e-4 / delay)
  const knee = 1 / delay
  const steps = Math.ceil(60 * Math.log10(knee / low))
  for (let i = 0; i < steps; i++) points.push(low * (knee / low) ** (i / steps))
  for (let x = 1; x <= 60; x += 0.08) points.push(x / delay)
  return Float64Array.from(points)
}

/** Bisection to the last digits; the grid has bracketed one sign change. */
function root(f: (x: number) => number, low: number, high: number): number {
  const sign = Math.sign(f(low))
  for (let i = 0; i < 60 && high - low > 1e-15 * high; i++) {
    const middle = (low + high) / 2
    if (Math.sign(f(middle)) === sign) low = middle
    else high = middle
  }
  return (low + high) / 2
}

/** Largest value: golden-section search around every grid point that is a local maximum near the top. */
function peak(f: (w: number) => number, grid: Float64Array): number {
  const values = grid.map(f)
  const top = values.reduce((a, b) => Math.max(a, b), 0)
  let best = top
  for (let i = 1; i + 1 < grid.length; i++) {
    if (values[i] < 0.9 * top || values[i] < values[i - 1] || values[i] < values[i + 1]) continue
    let a = grid[i - 1]
    let b = grid[i + 1]
    const golden = (Math.sqrt(5) - 1) / 2
    for (let k = 0; k < 60 && b - a > 1e-9 * b; k++) {
      const c = b - golden * (b - a)
      const d = a + golden * (b - a)
      if (f(c) > f(d)) b = d
      else a = c
    }
    best = Math.max(best, f((a + b) / 2))
  }
  return best
}
