export interface Demodulated { re: Float64Array, im: Float64Array }

/**
 * Coherence of two demodulated oscillations over their common windows, and the lag of the second behind the first.
 *
 * Both are weighed by their amplitudes, so windows in which neither hunts count for nothing. Under independence the
 * squared coherence of K windows exceeds c with probability (1 - c)^(K - 1), which is the significance given.
 *
 * @returns `coherence` 0..1; `windows` K common ones; `chance` probability under independence; `lagS` of b behind a,
 * s, in (-period/2, period/2]; NaN lag and coherence 0 with fewer than 4 common windows
 * @throws RangeError on different lengths
 * Source: Goodman (1957), distribution of the sample coherence; Brillinger (1975), Time Series, ch. 8.
 */
export function phaseCoherence(a: Demodulated, b: Demodulated, periodS: number): { coherence: number, windows: number, chance: number, lagS: number } {
  if (a.re.length !== b.re.length) throw new RangeError(`phaseCoherence: ${a.re.length} windows against ${b.re.length}`)
  let re = 0
  let im = 0
  let powerA = 0
  let powerB = 0
  let windows = 0
  for (let k = 0; k < a.re.length; k++) {
    if (a.re[k] !== a.re[k] || b.re[k] !== b.re[k]) continue
    re += a.re[k] * b.re[k] + a.im[k] * b.im[k]
    im += a.im[k] * b.re[k] - a.re[k] * b.im[k]
    powerA += a.re[k] ** 2 + a.im[k] ** 2
    powerB += b.re[k] ** 2 + b.im[k] ** 2
    windows++
  }
  if (windows < 4 || powerA === 0 || powerB === 0) return { coherence: 0, windows, chance: 1, lagS: NaN }
  const coherence = Math.min(1, Math.hypot(re, im) / Math.sqrt(powerA * powerB))
  const chance = (1 - coherence ** 2) ** (windows - 1)
  // a * conj(b) has the angle phase(a) - phase(b); a later b has the smaller phase, hence a positive lag
  return { coherence, windows, chance, lagS: Math.atan2(im, re) / (2 * Math.PI) * periodS }
}
