import type { ProcessModel } from '../types'
import { estimateNoise } from './estimateNoise'
import { solveSymmetric } from './solveSymmetric'
import { unitResponse } from './unitResponse'
import { whiten, type NoiseModel } from './whiten'
import type { FitStretch, FittedParameter, ModelFit } from './fitModel'
import { jackknife, type NormalEquations } from './jackknife'

/** Samples after the lead-in whose noise has no known past. */
const skip = 12
/** Blocks of the jackknife: long against the noise, many enough to count. */
const blocksWanted = 8
/** Good enough to tell starts apart: slow noise down, fast noise not blown up. */
const rough: NoiseModel = { a: Float64Array.of(-0.5, -0.4) }

export interface Solution {
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
export class FitProblem {
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
