import { crossCorrelation } from '../statistics/crossCorrelation'
import { insufficient, type Insufficient } from '../types'

export interface CrossCorrelationResult {
  /** relative difference of the first zero crossings either side of lag 0; >= 2/3 odd, <= 1/3 even */
  lagAsymmetry: number
  /** relative difference of the value at lag 0 and the extreme between the crossings; >= 1/3 odd, <= 0.0718 even */
  valueAsymmetry: number
  valueAtZero: number
  extreme: number
  /** first zero crossings, samples, > 0 */
  lagRight: number
  lagLeft: number
  says: 'sticking' | 'sound' | 'undecided'
}

/** (2 - sqrt 3) / (2 + sqrt 3): a phase of 30 degrees. */
const EVEN_VALUE = (2 - Math.sqrt(3)) / (2 + Math.sqrt(3))

/**
 * Horch's test: the cross-correlation of output and process variable is odd around lag 0 with a sticking valve, even with
 * an outside disturbance or tight tuning.
 *
 * Domain: oscillating loop on a self-regulating process under PI control, in automatic, output not saturated. Weak on its
 * own: in closed loop the phase mirrors the period against the integral time, so `undecided` is common.
 * @param op controller output, length n, finite
 * @param pv process variable, length n, finite
 * @param maxLag samples, integer, 1..n - 1; one period is enough
 * @returns insufficient when a signal stands still or the correlation does not cross zero within maxLag
 * @throws RangeError as crossCorrelation does
 * Source: Horch 1999, "A simple method for detection of stiction in control valves". Fixture: fixtures/reference/stiction.json.
 */
export function crossCorrelationTest(op: Float64Array, pv: Float64Array, maxLag: number): CrossCorrelationResult | Insufficient {
  const c = crossCorrelation(pv, op, maxLag)
  const valueAtZero = c[maxLag]
  if (Number.isNaN(valueAtZero)) return insufficient('output or process variable stands still')
  const crossing = (side: 1 | -1) => {
    for (let lag = 1; lag <= maxLag; lag++) {
      const before = c[maxLag + side * (lag - 1)], here = c[maxLag + side * lag]
      if (before * here < 0 || here === 0) return lag - 1 + before / (before - here)
    }
    return null
  }
  const lagRight = crossing(1), lagLeft = crossing(-1)
  if (lagRight === null || lagLeft === null) return insufficient('the cross-correlation does not cross zero within a period')
  let largest = 0
  for (let lag = -Math.floor(lagLeft); lag <= Math.floor(lagRight); lag++) largest = Math.max(largest, Math.abs(c[maxLag + lag]))
  const extreme = Math.sign(valueAtZero) * largest
  const lagAsymmetry = Math.abs(lagLeft - lagRight) / (lagLeft + lagRight)
  const valueAsymmetry = Math.abs(valueAtZero - extreme) / Math.abs(valueAtZero + extreme)
  const odd = valueAsymmetry >= 1 / 3 && lagAsymmetry >= 2 / 3
  const even = valueAsymmetry <= EVEN_VALUE && lagAsymmetry <= 1 / 3
  return { lagAsymmetry, valueAsymmetry, valueAtZero, extreme, lagRight, lagLeft, says: odd ? 'sticking' : even ? 'sound' : 'undecided' }
}
