import { insufficient, type Insufficient } from '../types'
import { cycles } from './cycles'

export interface ApparentStiction {
  /** mean width of the loop along the output, % of output span */
  percent: number
  /** 95 % interval from the scatter between cycles */
  low: number
  high: number
  cycles: number
}

const FEWEST = 5
const POINTS = 64

/**
 * Apparent stiction: mean width of the loop that process variable over output describes, taken along the output, as its
 * area over its height, cycle by cycle. Noise averages out of the area.
 *
 * Equal to the dead band of a valve with backlash, and to stick band (S) where the stem only jumps to and fro; between S - J
 * and S otherwise. The lag of the process widens the loop too, so it is an upper bound, and says nothing about a sound valve.
 * Domain: detected oscillation with signs of sticking, self-regulating process, at least 5 whole cycles.
 * @param op controller output, finite, length n
 * @param pv process variable, finite, length n
 * @param options periodSamples >= 4; opSpan > 0, unit of op
 * Source: definition after Choudhury, Jain, Shah 2008, "Stiction - definition, modelling, detection and quantification"
 * (width of the loop along the output); mean width instead of a fitted ellipse is ours. O(n log n).
 */
export function apparentStiction(op: Float64Array, pv: Float64Array, { periodSamples, opSpan }: { periodSamples: number, opSpan: number }): ApparentStiction | Insufficient {
  if (op.length !== pv.length) throw new RangeError(`op and pv must have one length, got ${op.length} and ${pv.length}`)
  if (!(opSpan > 0)) throw new RangeError(`opSpan must be above 0, got ${opSpan}`)
  const found = cycles(pv, periodSamples)
  const n = found.length
  if (n < FEWEST) return insufficient(`${n} whole cycles, ${FEWEST} are needed`)
  const areas = new Float64Array(n), mean = new Float64Array(POINTS)
  for (let c = 0; c < n; c++) {
    const [from, to] = found[c]
    const u = new Float64Array(POINTS), y = new Float64Array(POINTS)
    for (let p = 0; p < POINTS; p++) {
      const at = from + (to - from) * p / POINTS
      const i = Math.min(Math.floor(at), pv.length - 2), part = at - i
      u[p] = op[i] * (1 - part) + op[i + 1] * part
      y[p] = pv[i] * (1 - part) + pv[i + 1] * part
      mean[p] += y[p] / n
    }
    for (let p = 0; p < POINTS; p++) {
      const q = (p + 1) % POINTS
      areas[c] += (u[p] + u[q]) / 2 * (y[q] - y[p])
    }
  }
  const height = Math.max(...mean) - Math.min(...mean)
  if (!(height > 0)) return insufficient('the process variable stands still')
  const widths = areas.map(area => 100 * area / height / opSpan)
  const average = widths.reduce((s, w) => s + w, 0) / n
  const sd = Math.sqrt(widths.reduce((s, w) => s + (w - average) ** 2, 0) / (n - 1))
  // Student's quantile to 0.1 from 4 degrees of freedom on
  const reach = (1.96 + 3 / (n - 1)) * sd / Math.sqrt(n)
  const percent = Math.abs(average)
  return { percent, low: Math.max(0, percent - reach), high: percent + reach, cycles: n }
}
