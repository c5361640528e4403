/**
 * Looks at a detected oscillation cycle by cycle: how much amplitude and period vary, how the phase wanders over many
 * cycles, and which harmonics the mean cycle of PV and OP has.
 *
 * The longest piece of an episode is band-passed about its frequency; its rising zero crossings cut the cycles; harmonics 1 to 5
 * are taken from the unfiltered record cycle by cycle, after a straight line through the cycle's ends (quarter-cycle means)
 * is taken off, and averaged with the phase of each cycle's first harmonic, so that a wandering period does not smear them.
 * Cost O(n log n) over at most MOST_CYCLES cycles. Source: ours; what the figures tell apart: a line that is carried in keeps amplitude and
 * phase, a resonance fed by disturbances keeps neither, a limit cycle keeps amplitude and has odd harmonics (common practice, no source).
 */
import { bandPass } from '../spectrum/bandPass'

const MOST_CYCLES = 80
const HARMONICS = 5

export interface CycleShape {
  cycles: number
  samplesPerCycle: number
  /** robust coefficient of variation of the first harmonic's amplitude */
  amplitudeVariation: number
  /** robust coefficient of variation of the period */
  periodVariation: number
  /** rms deviation of the crossings from an even beat over up to 20 cycles, in periods */
  phaseWander: number
  /** mean amplitude of the first harmonic, PV unit and OP unit */
  pvAmplitude: number
  opAmplitude: number
  /** third harmonic of PV in step with the first, relative to it: square about +1/3, triangle about -1/9, sine 0 */
  pvThird: number
  opThird: number
  /** quadrature part of the third harmonic */
  pvThirdQuadrature: number
  opThirdQuadrature: number
  /** size of the odd harmonics 3 and 5, and of the even ones 2 and 4, relative to the first, coherent over the cycles */
  pvOdd: number
  pvEven: number
  opOdd: number
  opEven: number
  /** third harmonic's power over its own standard error squared */
  pvThirdStrength: number
  opThirdStrength: number
  /** share of the variance within the cycles that the mean cycle explains */
  pvCoherence: number
}

/**
 * @param pv deviation of PV (or minus the control error), regular samples, finite, length n
 * @param op controller output of the same samples, or null
 * @param period samples, >= 4
 * @returns null below 5 whole cycles
 */
export function cycleShape(pv: Float64Array, op: Float64Array | null, period: number): CycleShape | null {
  if (!(period >= 2)) throw new RangeError(`cycleShape: period must be at least 2 samples, got ${period}`)
  const length = Math.min(pv.length, Math.ceil(MOST_CYCLES * period))
  if (length < 6 * period) return null
  const from = (pv.length - length) >> 1
  const x = pv.subarray(from, from + length)
  const u = op ? op.subarray(from, from + length) : null
  const band = bandPass(x, { sampleIntervalS: 1, lowHz: 0.6 / period, highHz: Math.min(0.5, 1.6 / period) })
  const crossings: number[] = []
  for (let i = 1; i < length; i++) {
    if (band[i - 1] <= 0 && band[i] > 0) crossings.push(i - 1 + band[i - 1] / (band[i - 1] - band[i]))
  }
  const cycles: [number, number][] = []
  const periods: number[] = []
  for (let k = 1; k < crossings.length; k++) {
    const d = crossings[k] - crossings[k - 1]
    if (d > 0.4 * period && d < 2 * period) {
      cycles.push([crossings[k - 1], crossings[k]])
      periods.push(d)
    }
  }
  if (cycles.length < 5) return null

  const p = meanCycle(x, cycles)
  if (!p) return null
  const o = u ? meanCycle(u, cycles) : null
  return {
    cycles: cycles.length,
    samplesPerCycle: period,
    amplitudeVariation: spread(p.amplitudes),
    periodVariation: spread(periods),
    phaseWander: wander(crossings, 20),
    pvAmplitude: p.amplitude,
    opAmplitude: o ? o.amplitude : NaN,
    pvThird: p.third,
    opThird: o ? o.third : NaN,
    pvThirdQuadrature: p.thirdQuadrature,
    opThirdQuadrature: o ? o.thirdQuadrature : NaN,
    pvOdd: p.odd,
    pvEven: p.even,
    opOdd: o ? o.odd : NaN,
    opEven: o ? o.even : NaN,
    pvThirdStrength: p.thirdStrength,
    opThirdStrength: o ? o.thirdStrength : NaN,
    pvCoherence: p.coherence,
  }
}

function meanCycle(x: Float64Array, cycles: [number, number][]) {
  const count = cycles.length
  const re = new Float64Array((HARMONICS + 1) * count)
  const im = new Float64Array((HARMONICS + 1) * count)
  let total = 0
  const amplitudes: number[] = []
  for (let c = 0; c < count; c++) {
    const [a, b] = cycles[c]
    const T = b - a
    const i0 = Math.ceil(a)
    const i1 = Math.min(x.length, Math.ceil(b))
    const n = i1 - i0
    // slow part: mean of the cycle and the drift from half a cycle before to half a cycle after
    const slope = driftOf(x, i0, i1)
    let mean = 0
    for (let i = i0; i < i1; i++) mean += x[i] - slope * (i - i0)
    mean /= n
    let square = 0
    for (let i = i0; i < i1; i++) {
      const v = x[i] - slope * (i - i0) - mean
      square += v * v
      const angle = (2 * Math.PI * (i - a)) / T
      const cos = Math.cos(angle)
      const sin = Math.sin(angle)
      let hc = 1
      let hs = 0
      for (let h = 1; h <= HARMONICS; h++) {
        const next = hc * cos - hs * sin
        hs = hc * sin + hs * cos
        hc = next
        re[h * count + c] += v * hc
        im[h * count + c] += v * hs
      }
    }
    total += square / n
    for (let h = 1; h <= HARMONICS; h++) {
      re[h * count + c] *= 2 / n
      im[h * count + c] *= 2 / n
    }
    amplitudes.push(Math.hypot(re[count + c], im[count + c]))
  }
  const amplitude = amplitudes.reduce((s, v) => s + v, 0) / count
  if (!(amplitude > 0)) return null
  // each harmonic turned back by h times the phase of its cycle's first, written against a sine
  const meanRe = new Float64Array(HARMONICS + 1)
  const meanIm = new Float64Array(HARMONICS + 1)
  const noise = new Float64Array(HARMONICS + 1)
  for (let h = 2; h <= HARMONICS; h++) {
    let squares = 0
    for (let c = 0; c < count; c++) {
      const phase = Math.atan2(re[count + c], im[count + c])
      const zr = im[h * count + c] * Math.cos(h * phase) + re[h * count + c] * Math.sin(h * phase)
      const zi = re[h * count + c] * Math.cos(h * phase) - im[h * count + c] * Math.sin(h * phase)
      meanRe[h] += zr
      meanIm[h] += zi
      squares += zr * zr + zi * zi
    }
    meanRe[h] /= count
    meanIm[h] /= count
    noise[h] = Math.max(1e-300, (squares / count - meanRe[h] ** 2 - meanIm[h] ** 2) / count)
  }
  const size = (h: number) => Math.sqrt(Math.max(0, meanRe[h] ** 2 + meanIm[h] ** 2 - noise[h])) / amplitude
  let explained = amplitude * amplitude / 2
  for (let h = 2; h <= HARMONICS; h++) explained += (meanRe[h] ** 2 + meanIm[h] ** 2) / 2
  return {
    amplitude,
    amplitudes,
    third: meanRe[3] / amplitude,
    thirdQuadrature: meanIm[3] / amplitude,
    odd: Math.hypot(size(3), size(5)),
    even: Math.hypot(size(2), size(4)),
    thirdStrength: (meanRe[3] ** 2 + meanIm[3] ** 2) / noise[3],
    coherence: Math.min(1, explained / (total / count)),
  }
}

/** Slope per sample between the means of the cycle's neighbours on both sides; 0 at the record's ends. */
function driftOf(x: Float64Array, i0: number, i1: number): number {
  const n = i1 - i0
  if (i0 - n < 0 || i1 + n > x.length) return 0
  let before = 0
  let after = 0
  for (let i = 0; i < n; i++) {
    before += x[i0 - n + i]
    after += x[i1 + i]
  }
  return (after - before) / n / (2 * n)
}

/** (84 % - 16 % quantile) / 2 over the median: the coefficient of variation of a normal sample, deaf to outliers. */
function spread(values: number[]): number {
  const s = [...values].sort((a, b) => a - b)
  const q = (f: number) => s[Math.min(s.length - 1, Math.max(0, Math.round(f * (s.length - 1))))]
  return (q(0.84) - q(0.16)) / 2 / q(0.5)
}

/** Rms deviation of the crossings from a straight beat, over windows of `length` cycles, in periods. */
function wander(crossings: number[], length: number): number {
  const n = Math.min(length, crossings.length)
  let sum = 0
  let count = 0
  for (let from = 0; from + n <= crossings.length; from += Math.max(1, n >> 1)) {
    let sk = 0
    let sz = 0
    for (let k = 0; k < n; k++) {
      sk += k
      sz += crossings[from + k]
    }
    let skk = 0
    let skz = 0
    for (let k = 0; k < n; k++) {
      skk += (k - sk / n) ** 2
      skz += (k - sk / n) * (crossings[from + k] - sz / n)
    }
    const slope = skz / skk
    let squares = 0
    for (let k = 0; k < n; k++) squares += (crossings[from + k] - sz / n - slope * (k - sk / n)) ** 2
    sum += squares / n / (slope * slope)
    count++
  }
  return Math.sqrt(sum / count)
}
