/**
 * Complex demodulation at one frequency: the amplitude and phase of an oscillation, window by window, against a clock
 * that all loops share, so that phases of different loops can be compared.
 *
 * Each window's answer is (2/n) sum of (x - mean) exp(-i omega t) over its finite samples under a Hann taper; a window
 * with fewer than 80 % finite samples is NaN. Cost: one pass.
 *
 * @param x samples, length n, NaN where missing
 * @param t0Ms epoch of the first sample, ms
 * @param sampleIntervalS spacing, s, above 0
 * @param periodS period of the demodulation, s; at least 4 samples
 * @param originMs common origin, ms; windows begin at origin + k * windowS
 * @param windowS length of a window, s; at least 2 periods
 * @param windows number of windows
 * @returns real and imaginary part per window, in the unit of x
 * @throws RangeError on a period below 4 samples or a window below 2 periods
 * Source: Bloomfield (1976), Fourier Analysis of Time Series: complex demodulation.
 */
export function demodulate(x: Float64Array, { t0Ms, sampleIntervalS, periodS, originMs, windowS, windows }: { t0Ms: number, sampleIntervalS: number, periodS: number, originMs: number, windowS: number, windows: number }): { re: Float64Array, im: Float64Array } {
  if (!(periodS >= 4 * sampleIntervalS)) throw new RangeError(`demodulate: a period of ${periodS} s is below 4 samples of ${sampleIntervalS} s`)
  if (!(windowS >= 2 * periodS)) throw new RangeError(`demodulate: a window of ${windowS} s is below 2 periods of ${periodS} s`)
  const re = new Float64Array(windows).fill(NaN)
  const im = new Float64Array(windows).fill(NaN)
  const perWindow = Math.round(windowS / sampleIntervalS)
  const omega = 2 * Math.PI / periodS
  const taperOf = Float64Array.from({ length: perWindow }, (_, k) => 0.5 - 0.5 * Math.cos(2 * Math.PI * (k + 0.5) / perWindow))
  const stepRe = Math.cos(omega * sampleIntervalS)
  const stepIm = Math.sin(omega * sampleIntervalS)
  for (let w = 0; w < windows; w++) {
    const first = Math.ceil((originMs + w * windowS * 1000 - t0Ms) / (sampleIntervalS * 1000))
    const last = Math.min(x.length, first + perWindow)
    if (first < 0 || last - first < perWindow * 0.8) continue
    let count = 0
    let mean = 0
    for (let k = first; k < last; k++) if (x[k] === x[k]) { mean += x[k]; count++ }
    if (count < perWindow * 0.8) continue
    mean /= count
    let sumRe = 0
    let sumIm = 0
    let sumTaper = 0
    // phase counted from the common origin in whole turns plus remainder, so that a long record loses no digits; within
    // the window by rotation, which errs by rounding only
    const angle = omega * (((t0Ms - originMs) / 1000 + first * sampleIntervalS) % periodS)
    let c = Math.cos(angle)
    let s = Math.sin(angle)
    for (let k = first; k < last; k++) {
      const value = x[k]
      if (value === value) {
        const taper = taperOf[k - first]
        sumRe += taper * (value - mean) * c
        sumIm -= taper * (value - mean) * s
        sumTaper += taper
      }
      const next = c * stepRe - s * stepIm
      s = s * stepRe + c * stepIm
      c = next
    }
    re[w] = 2 * sumRe / sumTaper
    im[w] = 2 * sumIm / sumTaper
  }
  return { re, im }
}
