import { baseband, stepSpectrum } from '../oscillation/baseband'
import { insufficient, type Insufficient } from '../types'

export interface LineWidth {
  /** full width at half height over the frequency: twice the damping for noise through a resonance; 0 when `atLimit` */
  relativeWidth: number
  /** cycles after which half of the coherence is left */
  coherentCycles: number
  /** the record is too short to see an end of the coherence: as narrow as can be told */
  atLimit: boolean
}

const FEWEST = 10

/**
 * Width of a spectral peak, from how long the oscillation stays coherent with itself: exp(-damping omega t) behind a
 * resonance, for ever in a line carried in. What noise beside the peak takes within the first cycle is left out.
 *
 * Domain: detected oscillation, at least 10 cycles in one piece.
 * @param signal finite, length n
 * @param periodSamples samples, >= 4
 * Source: definition (width of a Lorentzian from its correlation time); checked on resonances of known damping. O(n log n).
 */
export function lineWidth(signal: Float64Array, periodSamples: number): LineWidth | Insufficient {
  if (!(periodSamples >= 4)) throw new RangeError(`periodSamples must be at least 4, got ${periodSamples}`)
  const count = signal.length / periodSamples
  if (count < FEWEST) return insufficient(`${count.toFixed(1)} cycles, ${FEWEST} are needed`)
  const steps = new Float64Array(signal.length)
  for (let i = 1; i < signal.length; i++) steps[i] = signal[i] - signal[i - 1]
  const frequency = 1 / periodSamples
  const { a, stride } = baseband(stepSpectrum(steps), { frequency, low: frequency / 1.6, high: Math.min(0.5, 1.6 * frequency) })
  const n = a.length / 2
  const perPeriod = periodSamples / stride
  const longest = Math.floor(n / 2)
  const coherence = (lag: number) => {
    let re = 0, im = 0, one = 0, other = 0
    for (let i = 0; i + lag < n; i++) {
      const ar = a[2 * i], ai = a[2 * i + 1], br = a[2 * (i + lag)], bi = a[2 * (i + lag) + 1]
      re += ar * br + ai * bi
      im += ar * bi - ai * br
      one += ar * ar + ai * ai
      other += br * br + bi * bi
    }
    return Math.hypot(re, im) / Math.sqrt(one * other)
  }
  const start = Math.round(perPeriod)
  const first = coherence(start)
  if (!(first > 0)) return insufficient('no power at this period')
  for (let lag = start + 1; lag <= longest; lag = Math.max(lag + 1, Math.round(1.05 * lag))) {
    if (coherence(lag) > first / 2) continue
    const coherentCycles = (lag - start) / perPeriod
    return { relativeWidth: Math.LN2 / (Math.PI * coherentCycles), coherentCycles, atLimit: false }
  }
  return { relativeWidth: 0, coherentCycles: (longest - start) / perPeriod, atLimit: true }
}
