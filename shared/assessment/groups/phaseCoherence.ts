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

/**
 * Whether two oscillations wander together: the correlation of their phase steps from window to window, over windows in
 * which both are there. Two limit cycles of nearly the same period look coherent for as long as they have not drifted
 * apart; what they cannot have by chance is the same small quickening and slowing.
 *
 * @returns `correlation` -1..1 and `chance`, one-sided, under independence (Fisher's z); chance 1 with fewer than 12 steps
 * Source: Fisher (1915, 1921) for the distribution; the use is our own.
 */
export function commonWander(a: Demodulated, b: Demodulated): { correlation: number, chance: number, steps: number } {
  const size = (w: Demodulated, k: number) => Math.hypot(w.re[k], w.im[k])
  const least = [a, b].map((w) => {
    let sum = 0
    let n = 0
    for (let k = 0; k < w.re.length; k++) if (w.re[k] === w.re[k]) { sum += size(w, k); n++ }
    return n ? 0.5 * sum / n : Infinity
  })
  const there = (k: number) => size(a, k) > least[0] && size(b, k) > least[1]
  const step = (w: Demodulated, k: number) => Math.atan2(w.im[k + 1] * w.re[k] - w.re[k + 1] * w.im[k], w.re[k + 1] * w.re[k] + w.im[k + 1] * w.im[k])
  const x: number[] = []
  const y: number[] = []
  for (let k = 0; k + 1 < a.re.length; k++) if (there(k) && there(k + 1)) { x.push(step(a, k)); y.push(step(b, k)) }
  const n = x.length
  if (n < 12) return { correlation: NaN, chance: 1, steps: n }
  const mean = (v: number[]) => v.reduce((sum, e) => sum + e, 0) / n
  const [mx, my] = [mean(x), mean(y)]
  let xy = 0
  let xx = 0
  let yy = 0
  for (let k = 0; k < n; k++) { xy += (x[k] - mx) * (y[k] - my); xx += (x[k] - mx) ** 2; yy += (y[k] - my) ** 2 }
  if (xx === 0 || yy === 0) return { correlation: NaN, chance: 1, steps: n }
  const correlation = Math.max(-0.999999, Math.min(0.999999, xy / Math.sqrt(xx * yy)))
  // neighbouring steps share a window, which leaves half as many independent ones
  const z = Math.atanh(correlation) * Math.sqrt(Math.max(1, n / 2 - 3))
  return { correlation, chance: normalTail(z), steps: n }
}

/** P(N > z). Source: Abramowitz, Stegun (1964), 7.1.26, absolute error below 1.5e-7. */
function normalTail(z: number): number {
  const x = Math.abs(z) / Math.SQRT2
  const t = 1 / (1 + 0.3275911 * x)
  const erfc = t * (0.254829592 + t * (-0.284496736 + t * (1.421413741 + t * (-1.453152027 + t * 1.061405429)))) * Math.exp(-x * x)
  return z > 0 ? erfc / 2 : 1 - erfc / 2
}
