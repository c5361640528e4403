import type { ProcessModel } from '../types'
import type { FitStretch } from './fitModel'
import { solveSymmetric } from './solveSymmetric'
import { unitResponse } from './unitResponse'

/**
 * How well a given model (fitted elsewhere, or typed in) reproduces PV of a stretch from OP; only the level of PV and, for
 * an integrator, its slope are laid through the data.
 * @param interval s between samples
 * @returns fit in per cent, 100 (1 - |PV - simulated| / |PV - mean|), over the samples after the dead time; simulated PV, NaN before; NaN when PV does not move
 * @throws RangeError when lengths differ or the stretch is shorter than twice the dead time
 * Source: L. Ljung (1999) System Identification, 2nd ed., 16.6 (cross-validation).
 */
export function fitOnStretch(model: ProcessModel, { pv, op }: FitStretch, interval: number, hold: 'zero' | 'first' = 'first'): { fitPercent: number, simulated: Float64Array } {
  if (pv.length !== op.length) throw new RangeError(`fitOnStretch: PV has ${pv.length} samples and OP ${op.length}`)
  const start = Math.ceil(model.deadTime / interval) + 1
  if (pv.length < 2 * start + 2) throw new RangeError('fitOnStretch: the stretch is shorter than twice the dead time')
  const lags = model.kind === 'integrating' ? [] : model.kind === 'fopdt' ? [model.timeConstant] : [model.timeConstant, model.timeConstant2].filter(lag => lag > 0)
  const x = unitResponse(op, interval, lags, model.deadTime, hold, start, new Float64Array(op.length))
  const columns = [(_: number) => 1, ...(lags.length === 0 ? [(k: number) => (k - start) / pv.length] : lags.slice(0, 1).map(lag => (k: number) => Math.exp(-(k - start) * interval / lag)))]
  const n = columns.length
  const a = new Float64Array(n * n)
  const b = new Float64Array(n)
  for (let k = start; k < pv.length; k++) {
    for (let i = 0; i < n; i++) {
      b[i] += columns[i](k) * (pv[k] - model.processGain * x[k])
      for (let j = 0; j < n; j++) a[i * n + j] += columns[i](k) * columns[j](k)
    }
  }
  const weights = solveSymmetric(a, b, 1e-9)?.x ?? new Float64Array(n)
  const simulated = new Float64Array(pv.length).fill(NaN)
  let mean = 0
  for (let k = start; k < pv.length; k++) mean += pv[k] / (pv.length - start)
  let wrong = 0
  let all = 0
  for (let k = start; k < pv.length; k++) {
    simulated[k] = model.processGain * x[k] + columns.reduce((sum, column, i) => sum + weights[i] * column(k), 0)
    wrong += (pv[k] - simulated[k]) ** 2
    all += (pv[k] - mean) ** 2
  }
  return { fitPercent: all > 0 ? 100 * (1 - Math.sqrt(wrong / all)) : NaN, simulated }
}
