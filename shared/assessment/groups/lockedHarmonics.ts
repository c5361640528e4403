import { demodulate } from './demodulate'

/**
 * How far a wave is from a sine: amplitude of those harmonics whose phase is locked to the fundamental, over the
 * amplitude of the fundamental. Noise and other oscillations have no steady phase against the fundamental, so they
 * average out over the windows and do not count. A sine gives 0, a square wave sqrt(1/9 + 1/25 ...), a triangle 1/9.
 *
 * @param x samples, NaN where missing
 * @param options as for demodulate; harmonics 2, 3 and 5 are used as far as 4 samples a period reach
 * @returns `ratio`, 0 when nothing is significant; `sigmas` of the strongest harmonic under no locking; NaN ratio with
 * fewer than 6 usable windows
 * Source: own; phase locking of harmonics is what the bicoherence measures (Choudhury, Shah, Thornhill 2004), here for
 * a known fundamental, which keeps odd harmonics of symmetric limit cycles that the bicoherence cannot see.
 */
export function lockedHarmonics(x: Float64Array, options: { t0Ms: number, sampleIntervalS: number, periodS: number, originMs: number, windowS: number, windows: number }): { ratio: number, sigmas: number } {
  const fundamental = demodulate(x, options)
  let power = 0
  let strongest = 0
  let base = 0
  let used = 0
  for (let k = 0; k < options.windows; k++) if (fundamental.re[k] === fundamental.re[k]) { base += Math.hypot(fundamental.re[k], fundamental.im[k]); used++ }
  if (used < 6) return { ratio: NaN, sigmas: 0 }
  // windows in which the loop did not hunt have a phase of noise only
  const least = 0.5 * base / used
  for (const harmonic of [2, 3, 5]) {
    const periodS = options.periodS / harmonic
    if (periodS < 4 * options.sampleIntervalS) break
    const wave = demodulate(x, { ...options, periodS })
    let re = 0
    let im = 0
    let square = 0
    let weight = 0
    let n = 0
    for (let k = 0; k < options.windows; k++) {
      const size = Math.hypot(fundamental.re[k], fundamental.im[k])
      if (!(size > least) || wave.re[k] !== wave.re[k]) continue
      const angle = harmonic * Math.atan2(fundamental.im[k], fundamental.re[k])
      const c = Math.cos(angle)
      const s = Math.sin(angle)
      re += wave.re[k] * c + wave.im[k] * s
      im += wave.im[k] * c - wave.re[k] * s
      square += wave.re[k] ** 2 + wave.im[k] ** 2
      weight += size
      n++
    }
    if (n < 6 || square === 0) continue
    const locked = Math.hypot(re, im)
    // under random phases the resultant has root mean square sqrt(sum of squares)
    const sigmas = locked / Math.sqrt(square)
    strongest = Math.max(strongest, sigmas)
    if (sigmas > 3) power += (locked / weight) ** 2
  }
  return { ratio: Math.sqrt(power), sigmas: strongest }
}
