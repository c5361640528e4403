import type { ProcessModel } from '../types'
import { estimateNoise } from './estimateNoise'
import { solveSymmetric } from './solveSymmetric'
import { unitResponse } from './unitResponse'
import { whiten, type NoiseModel } from './whiten'

/** Evenly spaced samples without gaps; PV unit and OP unit. */
export interface FitStretch { pv: Float64Array, op: Float64Array }

export interface FitOptions {
  kind: ProcessModel['kind']
  /** s between samples */
  interval: number
  /** s; a quarter of the shortest stretch at most, which is also taken when left out. */
  maximumDeadTime?: number
  /** How OP moves between samples; `first` when left out (a controller that runs faster than the historian samples). */
  hold?: 'zero' | 'first'
  /**
   * What moved OP; `natural` when left out, the most careful. In automatic the newest OP already
   * holds the newest noise of PV, so dead times below one interval are not tried (with `hold: 'first'`).
   */
  excitation?: 'setpointStep' | 'manualMove' | 'natural'
  /** Half width of the 95 % interval over the value that gain and lag may have at most; 0.13 when left out. */
  maximumRelativeHalfWidth?: number
}

export interface FittedParameter { value: number, /** 95 % interval */ low: number, high: number }

export interface ModelFit {
  status: 'ok'
  model: ProcessModel
  parameters: {
    processGain: FittedParameter
    deadTime: FittedParameter
    timeConstant?: FittedParameter
    timeConstant2?: FittedParameter
  }
  /** 100 (1 - |PV - simulated| / |PV - mean|), over all stretches; 100 is perfect, below 0 worse than the mean. */
  fitPercent: number
  /** True where the plain fit was taken, because the process is not exactly of this kind; see `fitModel`. Criteria then compare badly. */
  plain: boolean
  /** Bayesian information criterion; smaller is better, comparable between kinds on the same stretches. */
  criterion: number
  /** Akaike's, likewise. */
  akaike: number
  /** Order of the autoregressive noise model. */
  noiseOrder: number
  /** Standard deviation of the whitened residual, PV unit. */
  residualStandardDeviation: number
  /** Largest autocorrelation of the whitened residual at lags 1..20 in units of its standard error; above about 3.5 the noise model falls short. */
  residualCorrelation: number
  samples: number
  /** Per stretch, NaN over the lead-in: simulated PV, and the whitened residual. */
  simulated: Float64Array[]
  residuals: Float64Array[]
}

/** `best` is what was found, for the record; it must not be used for tuning. */
export interface InsufficientFit { status: 'insufficient', reason: string, best?: ModelFit }

/**
 * Fits a process model from OP to PV by prediction-error least squares: output error with an autoregressive noise model,
 * so that feedback and coloured disturbances do not bias it.
 * A grid over dead time and lag gives the start; Levenberg-Marquardt on them, the linear parameters (gain, level and
 * start-up of each stretch) projected out, in turn with the noise model, ends it. Intervals are 95 %: the larger of the
 * Fisher information and a delete-a-block jackknife, and half an interval of doubt about when OP moved.
 * Cost: about 100 grid points and 40 iterations, each some 100 operations a sample.
 * @throws RangeError when lengths differ, samples are not numbers or the interval is not positive
 * Source: L. Ljung (1999) System Identification, 2nd ed., ch. 7, 9, 13 (direct method in closed loop); G. H. Golub,
 *   V. Pereyra (1973), variable projection, SIAM J. Numer. Anal. 10:413-432; J. Shao, D. Tu (1995), The Jackknife and Bootstrap.
 * Checked on simulated loops whose truth is known: tests/control/identification.
 */
export function fitModel(stretches: readonly FitStretch[], options: FitOptions): ModelFit | InsufficientFit {
  const { kind, interval, hold = 'first', excitation = 'natural', maximumRelativeHalfWidth = 0.13 } = options
  if (!(interval > 0)) throw new RangeError(`fitModel: the interval must be positive, got ${interval}`)
  for (const { pv, op } of stretches) {
    if (pv.length !== op.length) throw new RangeError(`fitModel: PV has ${pv.length} samples and OP ${op.length}`)
    if (!pv.every(Number.isFinite) || !op.every(Number.isFinite)) throw new RangeError('fitModel: a sample is not a number; cut the stretches at gaps')
  }
  const insufficient = (reason: string, best?: ModelFit): InsufficientFit => ({ status: 'insufficient', reason, best })
  if (stretches.length === 0) return insufficient('There is no stretch to fit.')
  const shortest = Math.min(...stretches.map(s => s.pv.length))
  if (shortest < 40) return insufficient(`A stretch has only ${shortest} samples; at least 40 are needed.`)
  const movement = Math.max(...stretches.map(({ op }) => range(op)))
  if (movement === 0) return insufficient('OP does not move in the stretches, so they say nothing about the process.')
  if (Math.max(...stretches.map(({ pv }) => range(pv))) === 0) return insufficient('PV does not move in the stretches.')

  const lead = Math.max(2, Math.min(Math.floor(shortest / 4), Math.ceil((options.maximumDeadTime ?? shortest * interval / 4) / interval) + 1))
  const problem = new Problem(stretches, interval, kind, hold, lead)
  const smallestDeadTime = excitation !== 'manualMove' && hold === 'first' ? interval : 0
  const largestDeadTime = (lead - 1) * interval
  const longest = Math.max(...stretches.map(s => s.pv.length)) * interval

  // Start: for every dead time and lag the linear parameters by least squares, whitened once.
  const starts: { cost: number, nonlinear: number[] }[] = []
  const deadTimes = spread(smallestDeadTime, largestDeadTime, interval, 12)
  const lags = kind === 'integrating' ? [0] : geometric(2 * interval, longest, 8)
  for (const deadTime of deadTimes) {
    for (const lag of lags) {
      for (const ratio of kind === 'sopdt' ? [0.4] : [0]) {
        const nonlinear = kind === 'integrating' ? [deadTime] : kind === 'fopdt' ? [deadTime, Math.log(lag)] : [deadTime, Math.log(lag), Math.log(lag * ratio)]
        starts.push({ cost: problem.projectedCost(nonlinear), nonlinear })
      }
    }
  }
  starts.sort((a, b) => a.cost - b.cost)
  let best: Solution | null = null
  const consider = (solution: Solution | null) => {
    if (solution && (!best || solution.sumOfSquares < best.sumOfSquares)) best = solution
  }
  // A second start only where it lies in another valley.
  const other = starts.find(s => Math.abs(s.nonlinear[0] - starts[0].nonlinear[0]) > 2.5 * interval && s.cost < 1.3 * starts[0].cost)
  consider(problem.refine(starts[0].nonlinear, smallestDeadTime, largestDeadTime))
  if (other) consider(problem.refine(other.nonlinear, smallestDeadTime, largestDeadTime))
  // Where the noise is tiny the misfit of the start passes for noise and holds the fit there: start once more from a plain one.
  const plain = problem.refine(starts[0].nonlinear, smallestDeadTime, largestDeadTime, true)
  const near = (a: number[], b: number[]) => a.every((v, i) => Math.abs(v - b[i]) < (i === 0 ? interval : 0.1))
  if (plain && !(best && near((best as Solution).nonlinear, plain.nonlinear))) consider(problem.refine(plain.nonlinear, smallestDeadTime, largestDeadTime))
  if (!best) return insufficient('The fit did not converge: the data do not determine a model of this kind.')
  let solution: Solution = best
  let fit = problem.report(solution)
  // No real process is exactly of one of these kinds. Where OP was moved from outside and the whitened fit, which looks at
  // the short run, leaves much of the long run unexplained, the plain fit is the better model to tune on; its intervals
  // come from the jackknife. Not on natural excitation: there a plain fit finds the controller instead of the process.
  if (plain && excitation !== 'natural') {
    const plainFit = problem.report(plain)
    if (plainFit.fitPercent > 75 && plainFit.fitPercent > fit.fitPercent + 5) {
      solution = plain
      fit = plainFit
    }
  }
  const { processGain, deadTime, timeConstant, timeConstant2 } = fit.parameters

  if (!(fit.fitPercent > 10)) return insufficient(`The best model explains hardly any of the movement of PV (fit ${fit.fitPercent.toFixed(0)} %): disturbances dominate, or OP moved too little.`, fit)
  if (solution.nonlinear[0] >= largestDeadTime - 1e-6 * interval) return insufficient('The dead time found lies at the end of the range searched; the stretch is too short or the model of the wrong kind.', fit)
  if (timeConstant && timeConstant.value > longest) return insufficient('The lag found is longer than the stretch: over this time the process looks like an integrator.', fit)
  const width = (p: FittedParameter) => (p.high - p.low) / 2 / Math.abs(p.value)
  if (!(width(processGain) <= maximumRelativeHalfWidth)) return insufficient(`The process gain is known only to ${percent(width(processGain))} (95 %): OP moved too little or too briefly against the disturbances.`, fit)
  if (timeConstant && !(width(timeConstant) <= maximumRelativeHalfWidth)) return insufficient(`The lag is known only to ${percent(width(timeConstant))} (95 %): OP moved too little or too briefly against the disturbances.`, fit)
  if (timeConstant2 && !(width(timeConstant2) <= 1)) return insufficient('A second lag cannot be told from the dead time in these data.', fit)
  const slowest = deadTime.value + (timeConstant?.value ?? 0)
  if (!((deadTime.high - deadTime.low) / 2 <= Math.max(interval, 0.3 * (kind === 'integrating' ? Math.max(deadTime.value, 2 * interval) : slowest)))) return insufficient(`The dead time is known only to within ${((deadTime.high - deadTime.low) / 2).toPrecision(2)} s (95 %).`, fit)
  return fit
}

/** Samples after the lead-in whose noise has no known past. */
const skip = 12
/** Blocks of the jackknife: long against the noise, many enough to count. */
const blocksWanted = 8
/** Good enough to tell starts apart: slow noise down, fast noise not blown up. */
const rough: NoiseModel = { a: Float64Array.of(-0.5, -0.4) }

interface Solution {
  plain: boolean
  nonlinear: number[]
  linear: Float64Array
  noise: NoiseModel
  sumOfSquares: number
  /** of all parameters, nonlinear ones first */
  variances: Float64Array
  parameters: number
}

/** The least-squares problem of one set of stretches: bookkeeping of parameters, residuals and derivatives. */
class Problem {
  private readonly columns: number
  private readonly perStretch: number
  /** Samples used after the lead-in, over all stretches. */
  readonly samples: number
  /** Weight of the prior on the start-up modes, whose size cannot exceed the range of PV. Needed because an upset that passes the process's lag looks just like such a mode. */
  private penalty = 0
  private readonly span: number

  constructor(
    private readonly stretches: readonly FitStretch[],
    private readonly interval: number,
    private readonly kind: ProcessModel['kind'],
    private readonly hold: 'zero' | 'first',
    private readonly lead: number,
  ) {
    // Level, and the fading of an unknown start (one decaying mode per lag; a slope for an integrator out of balance).
    this.perStretch = kind === 'sopdt' ? 3 : 2
    this.columns = 1 + this.perStretch * stretches.length
    this.span = Math.max(...stretches.map(s => range(s.pv)))
    this.samples = stretches.reduce((sum, s) => sum + s.pv.length - lead, 0)
  }

  private lags(nonlinear: readonly number[]): number[] {
    return nonlinear.slice(1).map(Math.exp)
  }

  /** Regressors of the linear parameters: for each stretch a list of columns over its samples after the lead-in. */
  private regressors(nonlinear: readonly number[]): Float64Array[][] {
    const lags = this.lags(nonlinear)
    return this.stretches.map(({ op }) => {
      const x = unitResponse(op, this.interval, lags, nonlinear[0], this.hold, this.lead, new Float64Array(op.length)).subarray(this.lead)
      const n = x.length
      const modes = this.kind === 'integrating' ? [ramp(n)] : lags.map((lag, i) => fading(n, this.interval / lag, i === 1 && Math.abs(lag / lags[0] - 1) < 0.05))
      return [x, new Float64Array(n).fill(1), ...modes]
    })
  }

  private outputs(regressors: Float64Array[][], linear: Float64Array): Float64Array[] {
    return regressors.map((columns, s) => {
      const n = columns[0].length
      const y = new Float64Array(n)
      columns.forEach((column, c) => {
        const weight = linear[c === 0 ? 0 : 1 + s * this.perStretch + c - 1]
        for (let k = 0; k < n; k++) y[k] += weight * column[k]
      })
      return y
    })
  }

  private levelled(regressors: Float64Array[][], gain: number): Float64Array[] {
    return regressors.map(([x, ...rest], s) => {
      const pv = this.stretches[s].pv.subarray(this.lead)
      const fixed = x.map(v => gain * v)
      const m = rest.length
      const a = new Float64Array(m * m)
      const b = new Float64Array(m)
      for (let i = 0; i < m; i++) {
        for (let k = 0; k < x.length; k++) b[i] += rest[i][k] * (pv[k] - fixed[k])
        for (let j = 0; j < m; j++) for (let k = 0; k < x.length; k++) a[i * m + j] += rest[i][k] * rest[j][k]
      }
      const level = solveSymmetric(a, b, 1e-9)?.x ?? new Float64Array(m)
      rest.forEach((column, i) => { for (let k = 0; k < x.length; k++) fixed[k] += level[i] * column[k] })
      return fixed
    })
  }

  private errors(outputs: Float64Array[]): Float64Array[] {
    return outputs.map((y, s) => {
      const { pv } = this.stretches[s]
      const error = new Float64Array(y.length)
      for (let k = 0; k < y.length; k++) error[k] = pv[this.lead + k] - y[k]
      return error
    })
  }

  private linearFit(regressors: Float64Array[][], noise: NoiseModel): Float64Array {
    const n = this.columns
    const a = new Float64Array(n * n)
    const b = new Float64Array(n)
    regressors.forEach((columns, s) => {
      const white = columns.map(c => whiten(c, noise))
      const y = whiten(this.stretches[s].pv.subarray(this.lead), noise)
      const index = columns.map((_, c) => c === 0 ? 0 : 1 + s * this.perStretch + c - 1)
      white.forEach((u, i) => {
        for (let k = skip; k < y.length; k++) b[index[i]] += u[k] * y[k]
        for (let j = 0; j <= i; j++) {
          let sum = 0
          const v = white[j]
          for (let k = skip; k < y.length; k++) sum += u[k] * v[k]
          a[index[i] * n + index[j]] += sum
          if (index[i] !== index[j]) a[index[j] * n + index[i]] += sum
        }
      })
    })
    this.addPenalty(a, n, 0)
    return solveSymmetric(a, b, 1e-9)?.x ?? new Float64Array(n)
  }

  /** Adds the prior to the diagonal; `offset` is the place of the first linear parameter. */
  private addPenalty(a: Float64Array, size: number, offset: number, gradient?: { b: Float64Array, linear: Float64Array }): void {
    if (this.kind === 'integrating') return
    for (let c = 1; c < this.columns; c++) {
      if ((c - 1) % this.perStretch === 0) continue
      a[(offset + c) * (size + 1)] += this.penalty
      if (gradient) gradient.b[offset + c] -= this.penalty * gradient.linear[c]
    }
  }

  /** Rough cost of a start, whitened as for an upset that wanders under noise. */
  projectedCost(nonlinear: number[]): number {
    const regressors = this.regressors(nonlinear)
    return this.cost(regressors, this.linearFit(regressors, rough), rough)
  }

  /** Levenberg-Marquardt on dead time and lags with the linear parameters projected out, in turn with the noise model. */
  refine(start: number[], smallestDeadTime: number, largestDeadTime: number, plain = false): Solution | null {
    this.penalty = 0
    let nonlinear = [...start]
    let regressors = this.regressors(nonlinear)
    let noise = rough
    let linear = this.linearFit(regressors, noise)
    const q = nonlinear.length
    for (let round = 0; round < 4; round++) {
      const estimate = estimateNoise(this.errors(round === 0 ? this.levelled(regressors, linear[0]) : this.outputs(regressors, linear)), Math.min(skip, Math.floor(this.samples / this.stretches.length / 10)))
      noise = plain ? { a: new Float64Array(0) } : estimate.noise
      this.penalty = estimate.variance / this.span ** 2
      linear = this.linearFit(regressors, noise)
      let cost = this.cost(regressors, linear, noise)
      const costBefore = cost
      let damping = 1e-3
      let normal = this.normalEquations(nonlinear, regressors, linear, noise, largestDeadTime)
      for (let iteration = 0; iteration < 25; iteration++) {
        const step = solveSymmetric(normal.a, normal.b, damping)
        if (!step) {
          damping = Math.max(damping * 10, 1e-6)
          if (damping > 1e6) return null
          continue
        }
        const next = nonlinear.map((value, i) => value + step.x[i])
        next[0] = Math.min(largestDeadTime, Math.max(smallestDeadTime, next[0]))
        for (let i = 1; i < q; i++) next[i] = Math.min(nonlinear[i] + 1, Math.max(nonlinear[i] - 1, Math.min(Math.log(1e6 * this.interval), Math.max(Math.log(0.05 * this.interval), next[i]))))
        const nextRegressors = this.regressors(next)
        const nextLinear = this.linearFit(nextRegressors, noise)
        const nextCost = this.cost(nextRegressors, nextLinear, noise)
        if (nextCost < cost) {
          const gained = (cost - nextCost) / cost
          nonlinear = next
          linear = nextLinear
          regressors = nextRegressors
          cost = nextCost
          damping = Math.max(damping / 5, 1e-9)
          normal = this.normalEquations(nonlinear, regressors, linear, noise, largestDeadTime)
          if (gained < 1e-6) break
        }
        else {
          damping *= 4
          if (damping > 1e8) break
        }
      }
      if (round > 0 && (costBefore - cost) / cost < 1e-4) break
    }
    const blocks: NormalEquations[] = []
    const normal = this.normalEquations(nonlinear, regressors, linear, noise, largestDeadTime, blocks)
    const inverse = solveSymmetric(normal.a, normal.b, 0)?.inverse()
    if (!inverse) return null
    const total = q + this.columns
    const cost = this.cost(regressors, linear, noise)
    const degrees = this.samples - this.stretches.length * skip - total
    const fisher = Float64Array.from({ length: total }, (_, i) => inverse[i * (total + 1)] * cost / degrees)
    return { nonlinear, linear, noise, plain, sumOfSquares: cost, variances: jackknife(normal, blocks, fisher), parameters: total }
  }

  private cost(regressors: Float64Array[][], linear: Float64Array, noise: NoiseModel): number {
    let sum = 0
    for (const error of this.errors(this.outputs(regressors, linear))) {
      const white = whiten(error, noise)
      for (let k = skip; k < white.length; k++) sum += white[k] * white[k]
    }
    return sum
  }

  private normalEquations(nonlinear: number[], regressors: Float64Array[][], linear: Float64Array, noise: NoiseModel, largestDeadTime: number, blocks?: NormalEquations[]): NormalEquations {
    const q = nonlinear.length
    const total = q + this.columns
    const outputs = this.outputs(regressors, linear)
    const errors = this.errors(outputs)
    const slopes = nonlinear.map((value, i) => {
      const step = i === 0 ? 0.05 * this.interval : 1e-4
      const shifted = (sign: number) => {
        const moved = [...nonlinear]
        moved[i] = i === 0 ? Math.min(largestDeadTime, Math.max(0, value + sign * step)) : value + sign * step
        return { at: moved[i], y: this.outputs(this.regressors(moved), linear) }
      }
      const up = shifted(1)
      const down = shifted(-1)
      return up.y.map((y, s) => {
        const slope = new Float64Array(y.length)
        for (let k = 0; k < y.length; k++) slope[k] = (y[k] - down.y[s][k]) / (up.at - down.at)
        return slope
      })
    })
    const a = new Float64Array(total * total)
    const b = new Float64Array(total)
    errors.forEach((error, s) => {
      const white = whiten(error, noise)
      const columns: Float64Array[] = []
      const index: number[] = []
      slopes.forEach((slope, i) => {
        columns.push(whiten(slope[s], noise))
        index.push(i)
      })
      regressors[s].forEach((column, c) => {
        columns.push(whiten(column, noise))
        index.push(q + (c === 0 ? 0 : 1 + s * this.perStretch + c - 1))
      })
      const count = blocks ? Math.max(1, Math.round(blocksWanted * error.length / this.samples)) : 1
      for (let block = 0; block < count; block++) {
        const from = skip + Math.floor((error.length - skip) * block / count)
        const to = skip + Math.floor((error.length - skip) * (block + 1) / count)
        const part = { a: new Float64Array(total * total), b: new Float64Array(total) }
        columns.forEach((u, i) => {
          let right = 0
          for (let k = from; k < to; k++) right += u[k] * white[k]
          part.b[index[i]] += right
          for (let j = 0; j <= i; j++) {
            const v = columns[j]
            let sum = 0
            for (let k = from; k < to; k++) sum += u[k] * v[k]
            part.a[index[i] * total + index[j]] += sum
            if (i !== j) part.a[index[j] * total + index[i]] += sum
          }
        })
        for (let i = 0; i < a.length; i++) a[i] += part.a[i]
        for (let i = 0; i < total; i++) b[i] += part.b[i]
        blocks?.push(part)
      }
    })
    this.addPenalty(a, total, q, { b, linear })
    return { a, b }
  }

  report(solution: Solution): ModelFit {
    const { nonlinear, linear, noise, variances, parameters: total } = solution
    const regressors = this.regressors(nonlinear)
    const errors = this.errors(this.outputs(regressors, linear))
    // Under a slowly wandering disturbance the whitened fit leaves the levels almost free; for the eye and for the fit
    // in per cent they are laid through PV anew, gain and dynamics as found.
    const outputs = this.levelled(regressors, linear[0])
    const deviation = (i: number) => Math.sqrt(variances[i])
    // Student quantile for the number of blocks: the jackknife is an estimate too.
    const z = 2.36
    const q = nonlinear.length
    const gain = linear[0]
    const gainWidth = z * deviation(q)
    const lag = (i: number): FittedParameter => ({ value: Math.exp(nonlinear[i]), low: Math.exp(nonlinear[i] - z * deviation(i)), high: Math.exp(nonlinear[i] + z * deviation(i)) })
    // When OP moved between two samples is not in the record: uniform over one interval, besides the Fisher information.
    const timing = Math.hypot(deviation(0), this.interval / Math.sqrt(12))
    const deadTime: FittedParameter = { value: nonlinear[0], low: Math.max(0, nonlinear[0] - z * timing), high: nonlinear[0] + z * timing }
    const processGain: FittedParameter = { value: gain, low: gain - gainWidth, high: gain + gainWidth }
    const lags = nonlinear.slice(1).map((_, i) => lag(i + 1)).sort((x, y) => y.value - x.value)
    const model: ProcessModel = this.kind === 'integrating'
      ? { kind: 'integrating', processGain: gain, deadTime: deadTime.value }
      : this.kind === 'fopdt'
        ? { kind: 'fopdt', processGain: gain, timeConstant: lags[0].value, deadTime: deadTime.value }
        : { kind: 'sopdt', processGain: gain, timeConstant: lags[0].value, timeConstant2: lags[1].value, deadTime: deadTime.value }
    let wrong = 0
    let all = 0
    this.errors(outputs).forEach((error, s) => {
      const pv = this.stretches[s].pv.subarray(this.lead)
      const mean = pv.reduce((x, y) => x + y, 0) / pv.length
      for (let k = 0; k < error.length; k++) {
        wrong += error[k] ** 2
        all += (pv[k] - mean) ** 2
      }
    })
    const white = errors.map(e => whiten(e, noise).subarray(skip))
    const used = white.reduce((sum, w) => sum + w.length, 0)
    let worst = 0
    const power = solution.sumOfSquares
    for (let l = 1; l <= 20; l++) {
      let sum = 0
      for (const w of white) for (let k = l; k < w.length; k++) sum += w[k] * w[k - l]
      worst = Math.max(worst, Math.abs(sum / power) * Math.sqrt(used))
    }
    const padded = (values: Float64Array, s: number) => {
      const n = this.stretches[s].pv.length
      const out = new Float64Array(n).fill(NaN)
      out.set(values, n - values.length)
      return out
    }
    return {
      status: 'ok', model,
      parameters: { processGain, deadTime, ...(lags[0] && { timeConstant: lags[0] }), ...(lags[1] && { timeConstant2: lags[1] }) },
      fitPercent: 100 * (1 - Math.sqrt(wrong / all)),
      criterion: this.samples * Math.log(power / used) + total * Math.log(this.samples),
      akaike: this.samples * Math.log(power / used) + 2 * total,
      plain: solution.plain, noiseOrder: noise.a.length, residualStandardDeviation: Math.sqrt(power / used), residualCorrelation: worst, samples: this.samples,
      simulated: outputs.map(padded), residuals: white.map(padded),
    }
  }
}

interface NormalEquations { a: Float64Array, b: Float64Array }

/**
 * Variances that hold also where slow noise is left over that the noise model has missed: one Gauss-Newton step with each
 * block of time left out in turn; never below those of the Fisher information.
 * Source: delete-a-group jackknife, J. Shao, D. Tu (1995), The Jackknife and Bootstrap.
 */
function jackknife(all: NormalEquations, blocks: NormalEquations[], fisher: Float64Array): Float64Array {
  const g = blocks.length
  const n = all.b.length
  const sum = new Float64Array(n)
  let used = 0
  for (const { a, b } of blocks) {
    const step = solveSymmetric(all.a.map((v, i) => v - a[i]), all.b.map((v, i) => v - b[i]), 1e-9)?.x
    if (!step) continue
    used++
    for (let i = 0; i < n; i++) sum[i] += step[i] ** 2
  }
  return fisher.map((v, i) => used < g / 2 ? v : Math.max(v, sum[i] * (g - 1) / g * g / used))
}

/** exp(-k rate), or k rate exp(-k rate): the second of two nearly equal lags, which so stays independent of the first. */
function fading(n: number, rate: number, second: boolean): Float64Array {
  const out = new Float64Array(n)
  const f = Math.exp(-rate)
  let power = 1
  for (let k = 0; k < n && power > 1e-12; k++) {
    out[k] = second ? k * rate * power : power
    power *= f
  }
  return out
}

function ramp(n: number): Float64Array {
  const out = new Float64Array(n)
  for (let k = 0; k < n; k++) out[k] = k / n
  return out
}

const range = (x: Float64Array) => x.reduce((a, b) => Math.max(a, b), -Infinity) - x.reduce((a, b) => Math.min(a, b), Infinity)
const percent = (fraction: number) => fraction > 10 ? 'more than ±1000 %' : `±${(100 * fraction).toFixed(0)} %`
const geometric = (low: number, high: number, count: number) => Array.from({ length: count }, (_, i) => low * (high / low) ** (i / (count - 1)))
/** From low to high, fine near low and growing, on a grid of whole intervals where they are few. */
function spread(low: number, high: number, interval: number, count: number): number[] {
  const all = Math.floor((high - low) / interval)
  if (all <= count) return Array.from({ length: all + 1 }, (_, i) => low + i * interval)
  return Array.from({ length: count }, (_, i) => low + (high - low) * (i / (count - 1)) ** 1.7)
}
