import type { ProcessModel } from '../types'
import { FitProblem, type Solution } from './fitProblem'

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
  const problem = new FitProblem(stretches, interval, kind, hold, lead)
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

const range = (x: Float64Array) => x.reduce((a, b) => Math.max(a, b), -Infinity) - x.reduce((a, b) => Math.min(a, b), Infinity)
const percent = (fraction: number) => fraction > 10 ? 'more than ±1000 %' : `±${(100 * fraction).toFixed(0)} %`
const geometric = (low: number, high: number, count: number) => Array.from({ length: count }, (_, i) => low * (high / low) ** (i / (count - 1)))
/** From low to high, fine near low and growing, on a grid of whole intervals where they are few. */
function spread(low: number, high: number, interval: number, count: number): number[] {
  const all = Math.floor((high - low) / interval)
  if (all <= count) return Array.from({ length: all + 1 }, (_, i) => low + i * interval)
  return Array.from({ length: count }, (_, i) => low + (high - low) * (i / (count - 1)) ** 1.7)
}
