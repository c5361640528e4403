import { insufficient, type Insufficient } from '../types'
import { cycles } from './cycles'

export interface Harmonics {
  /** amplitude of orders 1..7, unit of the signal; coherent over the cycles, so noise averages out */
  amplitudes: Float64Array
  /** power of orders 3, 5, 7 over that of the first: 0.17 for a square, 0.014 for a triangle wave, 0 for a sine */
  oddShare: number
  /** power of orders 2, 4, 6 over that of the first */
  evenShare: number
  /** amplitude of the first order, cycle by cycle */
  perCycle: Float64Array
  /** lengths of the cycles, samples */
  lengths: Float64Array
}

const ORDERS = 7
const POINTS = 64
const FEWEST = 5

/**
 * Harmonics of an oscillation, cycle by cycle on a grid of its own length, so that a wandering period does not blur them.
 * The power that noise alone leaves in the mean is taken off the shares.
 *
 * Domain: detected oscillation, at least 5 whole cycles and 8 samples a period (below, the third order is out of reach).
 * @param signal finite, length n
 * @param periodSamples samples
 * Source: definition (Fourier series). Checked on square, triangle and sine. O(n log n).
 */
export function harmonics(signal: Float64Array, periodSamples: number): Harmonics | Insufficient {
  if (!(periodSamples >= 8)) return insufficient('fewer than 8 samples a period')
  const found = cycles(signal, periodSamples)
  if (found.length < FEWEST) return insufficient(`${found.length} whole cycles, ${FEWEST} are needed`)
  const n = found.length
  const re = new Float64Array(ORDERS + 1), im = new Float64Array(ORDERS + 1), squares = new Float64Array(ORDERS + 1)
  const perCycle = new Float64Array(n), lengths = new Float64Array(n)
  for (let c = 0; c < n; c++) {
    const [from, to] = found[c]
    lengths[c] = to - from
    const rise = at(signal, to) - at(signal, from)
    const cr = new Float64Array(ORDERS + 1), ci = new Float64Array(ORDERS + 1)
    for (let p = 0; p < POINTS; p++) {
      // the drift from begin to end of the cycle would show as a sawtooth
      const value = at(signal, from + (to - from) * p / POINTS) - rise * p / POINTS
      for (let h = 1; h <= ORDERS; h++) {
        const angle = 2 * Math.PI * h * p / POINTS
        cr[h] += value * Math.cos(angle) * 2 / POINTS
        ci[h] += value * Math.sin(angle) * 2 / POINTS
      }
    }
    perCycle[c] = Math.hypot(cr[1], ci[1])
    for (let h = 1; h <= ORDERS; h++) { re[h] += cr[h] / n; im[h] += ci[h] / n; squares[h] += (cr[h] ** 2 + ci[h] ** 2) / n }
  }
  const power = (h: number) => {
    if (2 * h > periodSamples) return 0
    const coherent = re[h] ** 2 + im[h] ** 2
    return Math.max(0, coherent - (squares[h] - coherent) / (n - 1))
  }
  const amplitudes = Float64Array.from({ length: ORDERS }, (_, i) => Math.sqrt(power(i + 1)))
  if (!(amplitudes[0] > 0)) return insufficient('no first harmonic at this period')
  return { amplitudes, oddShare: (power(3) + power(5) + power(7)) / power(1), evenShare: (power(2) + power(4) + power(6)) / power(1), perCycle, lengths }
}

function at(signal: Float64Array, position: number): number {
  const i = Math.min(Math.floor(position), signal.length - 2), part = position - i
  return signal[i] * (1 - part) + signal[i + 1] * part
}
