const HARMONICS = 5
const GRID = 96

export interface Waveform {
  /** half of the peak-to-peak swing of the mean cycle */
  swing: number
  /** mean square of the harmonics above the first */
  harmonicPower: number
}

/**
 * Mean cycle of an oscillation whose phase is known, as a sum of its first five harmonics; a harmonic counts when it stands
 * three standard errors above the rest. Noise averages out, unlike in a plain peak-to-peak.
 * @param signal values, NaN is skipped, length n; its slow part must be taken off before
 * @param phase radians, length n
 * O(n).
 */
export function waveform(signal: Float64Array, phase: Float64Array): Waveform {
  const re = new Float64Array(HARMONICS + 1), im = new Float64Array(HARMONICS + 1)
  let n = 0, squares = 0
  for (let i = 0; i < signal.length; i++) {
    const value = signal[i]
    if (value !== value) continue
    n++
    squares += value * value
    const c = Math.cos(phase[i]), s = Math.sin(phase[i])
    let hc = 1, hs = 0
    for (let h = 1; h <= HARMONICS; h++) {
      const next = hc * c - hs * s
      hs = hc * s + hs * c
      hc = next
      re[h] += value * hc
      im[h] += value * hs
    }
  }
  if (n < 8) return { swing: 0, harmonicPower: 0 }
  let rest = squares / n
  for (let h = 1; h <= HARMONICS; h++) {
    re[h] *= 2 / n
    im[h] *= 2 / n
    rest -= (re[h] ** 2 + im[h] ** 2) / 2
  }
  const limit = 9 * 4 * Math.max(0, rest) / n
  let harmonicPower = 0
  for (let h = 2; h <= HARMONICS; h++) {
    if (re[h] ** 2 + im[h] ** 2 < limit) re[h] = im[h] = 0
    else harmonicPower += (re[h] ** 2 + im[h] ** 2) / 2
  }
  let highest = -Infinity, lowest = Infinity
  for (let g = 0; g < GRID; g++) {
    let value = 0
    for (let h = 1; h <= HARMONICS; h++) if (re[h] || im[h]) value += re[h] * Math.cos(2 * Math.PI * h * g / GRID) + im[h] * Math.sin(2 * Math.PI * h * g / GRID)
    if (value > highest) highest = value
    if (value < lowest) lowest = value
  }
  return { swing: (highest - lowest) / 2, harmonicPower }
}
