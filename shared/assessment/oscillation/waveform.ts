const HARMONICS = 5

export interface Waveform {
  /** half of the peak-to-peak swing of the mean cycle */
  swing: number
  /** mean square of the harmonics above the first */
  harmonicPower: number
}

/**
 * Mean cycle of an oscillation whose phase is known, by its first five harmonics, which count when they stand three standard
 * errors above the rest, and where some do by means over bins of phase. Noise averages out, unlike in a plain peak-to-peak.
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
  // No harmonic stands out: the swing is the first one's amplitude. Bins would add their noise to it.
  if (harmonicPower === 0) return { swing: Math.hypot(re[1], im[1]), harmonicPower }
  const bins = Math.min(32, Math.max(8, Math.floor(n / 40)))
  const sums = new Float64Array(bins), counts = new Int32Array(bins)
  for (let i = 0; i < signal.length; i++) {
    if (signal[i] !== signal[i]) continue
    const turn = phase[i] / (2 * Math.PI)
    const bin = Math.min(bins - 1, Math.floor((turn - Math.floor(turn)) * bins))
    sums[bin] += signal[i]
    counts[bin]++
  }
  let highest = -Infinity, lowest = Infinity
  for (let bin = 0; bin < bins; bin++) {
    if (!counts[bin]) continue
    highest = Math.max(highest, sums[bin] / counts[bin])
    lowest = Math.min(lowest, sums[bin] / counts[bin])
  }
  return { swing: (highest - lowest) / 2, harmonicPower }
}
