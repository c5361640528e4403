import type { Oscillation } from '../types'
import { baseband, stepSpectrum, type StepSpectrum } from './baseband'
import { decayRatio } from './decayRatio'
import { episodes } from './episodes'
import { regularity } from './regularity'
import { spectralPeaks } from './spectralPeaks'
import { waveform } from './waveform'

export interface DetectOptions {
  /** s, > 0 */
  sampleIntervalS: number
  /** smaller swings are no oscillation, PV unit, >= 0 */
  minimumAmplitude: number
  /** standard deviation of the measurement noise, PV unit; smaller swings are no oscillation */
  noiseLevel?: number
  /** epoch ms of the first sample */
  t0Ms?: number
  /** slower swings are drift or the rhythm of the day, s; 4 h unless given (our default) */
  longestPeriodS?: number
}

/** Gaps up to this many samples are bridged by a line. */
const BRIDGED = 5
/** Lags of the autocorrelation to a period, and periods of it. */
const LAGS = 32, PERIODS = 7
/** Quarter decay, the published limit. */
const LOWEST_DECAY = 0.5
/** Samples to a period below which nothing is reported. */
const SHORTEST_PERIOD = 4
/** Least evidence of an episode (see evidence). */
const LEAST_EVIDENCE = 40
/** Share of an episode's energy within two periods from which it is the answer to a step or a spike. */
const TRANSIENT = 0.85
/** Swing to first harmonic: 1 for a sine, 0.79 for a square, 1.23 for a triangle wave. */
const LARGEST_SWING = 1.3
/** Least power of the narrow middle of the band over that of its flanks, in the episodes: noise has 1, whatever its strength. */
const LEAST_CONTRAST = 1.5
/** Samples that the mean cycle is taken from. */
const CYCLE_SAMPLES = 6000

/** `fundamental`: amplitude of the first harmonic */
interface Candidate extends Oscillation { frequency: number, fundamental: number, spans: [number, number][] }

/**
 * All oscillations of a control error, with period, swing, regularity, decay, share of the variance and the times at which
 * they were there.
 *
 * Peaks of the spectrum at several resolutions (spectralPeaks), one band per peak reaching at most to a factor of 1.6 and
 * half-way to the neighbouring peaks, its envelope for the episodes (episodes), and within the episodes the autocorrelation
 * of the band with its regularity (r > 1; Thornhill, Huang, Zhang 2003) and decay ratio (Miao, Seborg 1999). Harmonics of
 * a found oscillation are not reported. At least 5 cycles in one piece and 4 samples a period are needed.
 * @param error control error, regular samples, NaN where missing, length n (below 64: nothing is found)
 * @returns largest share of the variance first. `periodSdS` is the standard error of the period.
 * @throws RangeError on an option outside its range
 * O(n log n); about 10 ms for 20,000 samples.
 */
export function detectOscillations(error: Float64Array, options: DetectOptions): Oscillation[] {
  const { sampleIntervalS, minimumAmplitude, noiseLevel = 0, t0Ms = 0, longestPeriodS = 14_400 } = options
  if (!(sampleIntervalS > 0)) throw new RangeError(`sampleIntervalS must be above 0, got ${sampleIntervalS}`)
  if (!(minimumAmplitude >= 0)) throw new RangeError(`minimumAmplitude must be >= 0, got ${minimumAmplitude}`)
  if (error.length < 64) return []
  const smallest = Math.max(minimumAmplitude, noiseLevel)
  const { steps, present, variance } = differences(error)
  const peaks = spectralPeaks(steps, present, longestPeriodS / sampleIntervalS)
  if (!peaks.length || !(variance > 0)) return []
  const spectrum = stepSpectrum(steps)
  const found: Candidate[] = []
  for (const { frequency } of peaks) {
    let low = frequency / 1.6, high = Math.min(0.5, frequency * 1.6)
    for (const other of peaks) {
      const between = Math.sqrt(other.frequency * frequency)
      if (between < frequency && between > low) low = between
      if (between > frequency && between < high) high = between
    }
    const candidate = examine(error, spectrum, variance, { frequency, low, high, smallest, sampleIntervalS, t0Ms })
    if (candidate && candidate.periodS <= longestPeriodS) found.push(candidate)
  }
  found.sort((a, b) => b.strength - a.strength)
  return found
    .filter((one, i) => !found.some((other, j) => j !== i && isHarmonic(one, other)) && !found.slice(0, i).some(other => isTwin(one, other)))
    .map(({ frequency: _f, fundamental: _a, spans: _s, ...oscillation }) => oscillation)
}

/** Differences without the gaps, where there are samples, and the variance of what is there. */
function differences(error: Float64Array): { steps: Float64Array, present: Uint8Array, variance: number } {
  const n = error.length
  const steps = new Float64Array(n), present = new Uint8Array(n)
  let last = -1, count = 0, mean = 0, squares = 0
  for (let i = 0; i < n; i++) {
    const value = error[i]
    if (!Number.isFinite(value)) continue
    count++
    const delta = value - mean
    mean += delta / count
    squares += delta * (value - mean)
    present[i] = 1
    if (last >= 0 && i - last <= BRIDGED + 1) {
      const step = (value - error[last]) / (i - last)
      for (let j = last + 1; j <= i; j++) { steps[j] = step; present[j] = 1 }
    }
    last = i
  }
  return { steps, present, variance: count ? squares / count : 0 }
}

function examine(error: Float64Array, spectrum: StepSpectrum, variance: number, { frequency, low, high, smallest, sampleIntervalS, t0Ms }: {
  frequency: number, low: number, high: number, smallest: number, sampleIntervalS: number, t0Ms: number
}): Candidate | null {
  const { a, stride } = baseband(spectrum, { frequency, low, high })
  const n = a.length / 2
  const perPeriod = 1 / (frequency * stride)
  const smooth = movingMean(a, Math.max(1, Math.round(perPeriod)))
  const envelope = new Float64Array(n), smoothEnvelope = new Float64Array(n)
  let squares = 0, fourths = 0
  for (let i = 0; i < n; i++) {
    envelope[i] = Math.sqrt(a[2 * i] * a[2 * i] + a[2 * i + 1] * a[2 * i + 1])
    const square = smooth[2 * i] ** 2 + smooth[2 * i + 1] ** 2
    smoothEnvelope[i] = Math.sqrt(square)
    squares += square
    fourths += square * square
  }
  // Weighted by energy: the size while it hunts, also when that is a small part of the record.
  const size = Math.sqrt(fourths / squares)
  if (!(size > 0.5 * smallest)) return null
  const background = backgroundAmplitude(spectrum, frequency)
  const threshold = Math.max(0.3 * size, 0.6 * smallest, 1.5 * background)
  const spans = episodes(envelope, smoothEnvelope, { threshold, background, perPeriod })
    .filter(span => evidence(smoothEnvelope, span, background) / perPeriod > LEAST_EVIDENCE && largestShare(envelope, span, Math.round(2 * perPeriod)) < TRANSIENT)
  if (!spans.length) return null
  if (!(contrast(envelope, smoothEnvelope, spans) > LEAST_CONTRAST)) return null
  const covariance = maskedAutocovariance(a, spans, Math.ceil(PERIODS * perPeriod))
  const acf = fineAutocorrelation(covariance, perPeriod)
  const { regularity: r } = regularity(acf)
  const decay = decayRatio(acf)
  if (!(r > 1 && decay > LOWEST_DECAY)) return null
  const { offset, standardError } = phaseSlope(covariance, smooth, spans, perPeriod)
  const exact = frequency + offset / stride
  const period = 1 / exact
  if (period < SHORTEST_PERIOD || exact < low || exact > high) return null
  let time = 0, power = 0
  for (const [from, to] of spans) for (let i = from; i < to; i++) { time++; power += (smooth[2 * i] ** 2 + smooth[2 * i + 1] ** 2) / 2 }
  const fundamental = Math.sqrt(2 * power / time)
  const { swing, harmonicPower } = meanCycle(error, smooth, spans, { frequency, stride, period })
  // What swings far more than its first harmonic has the harmonics of another oscillation in its mean cycle.
  const amplitude = Math.min(swing, LARGEST_SWING * fundamental)
  if (!(amplitude >= smallest)) return null
  const toMs = (i: number) => t0Ms + Math.min(i * stride, error.length) * sampleIntervalS * 1000
  return {
    frequency: exact,
    fundamental,
    spans: spans.map(([from, to]) => [from * stride, to * stride]),
    periodS: period * sampleIntervalS,
    periodSdS: period * period * standardError / stride * sampleIntervalS,
    amplitude,
    regularity: r,
    decay,
    strength: Math.min(1, (power / n + harmonicPower * time / n) / variance),
    episodes: spans.map(([from, to]) => ({ fromMs: toMs(from), toMs: toMs(to) })),
  }
}

/** Centred mean over 2 half + 1 values, fewer at the ends; complex, interleaved. */
function movingMean(a: Float64Array, half: number): Float64Array {
  const n = a.length / 2
  const out = new Float64Array(2 * n)
  let re = 0, im = 0, count = 0
  for (let i = -half; i < n; i++) {
    if (i + half < n) { re += a[2 * (i + half)]; im += a[2 * (i + half) + 1]; count++ }
    if (i - half - 1 >= 0) { re -= a[2 * (i - half - 1)]; im -= a[2 * (i - half - 1) + 1]; count-- }
    if (i >= 0) { out[2 * i] = re / count; out[2 * i + 1] = im / count }
  }
  return out
}

/** What the surroundings of the peak alone would give as amplitude after smoothing over two periods. */
function backgroundAmplitude({ spectrum, size, length }: StepSpectrum, frequency: number): number {
  const density = (from: number, to: number) => {
    let sum = 0, count = 0
    for (let k = Math.max(1, Math.ceil(from * size)); k <= Math.min(size >> 1, to * size); k++) {
      sum += (spectrum[2 * k] ** 2 + spectrum[2 * k + 1] ** 2) / (4 * Math.sin(Math.PI * k / size) ** 2)
      count++
    }
    return count ? sum / count / length : 0
  }
  const sides = Math.sqrt(density(frequency / 1.8, frequency / 1.3) * density(frequency * 1.3, frequency * 1.8))
  // variance in a band of half the frequency is density x frequency; amplitude squared is twice that
  return Math.sqrt(2 * sides * frequency)
}

/**
 * Twice the logarithm of how unlikely noise alone would be as strong for as long, roughly: smoothed over two periods, noise
 * gives one independent value with an exponentially distributed square every two periods.
 */
function evidence(smoothEnvelope: Float64Array, [from, to]: [number, number], background: number): number {
  let squares = 0
  for (let i = from; i < to; i++) squares += smoothEnvelope[i] ** 2
  const ratio = squares / (to - from) / background ** 2
  return ratio > 1 ? (to - from) * (ratio - 1 - Math.log(ratio)) : 0
}

/** Power that smoothing leaves over power that it takes away, in the episodes: noise that only grew louder for a while has none. */
function contrast(envelope: Float64Array, smoothEnvelope: Float64Array, spans: [number, number][]): number {
  let all = 0, middle = 0
  for (const [from, to] of spans) for (let i = from; i < to; i++) { all += envelope[i] ** 2; middle += smoothEnvelope[i] ** 2 }
  return middle / Math.max(all - middle, 1e-12 * all)
}

/** Largest share of the energy within `width` successive values. */
function largestShare(envelope: Float64Array, [from, to]: [number, number], width: number): number {
  let sum = 0, total = 0, largest = 0
  for (let i = from; i < to; i++) {
    const square = envelope[i] * envelope[i]
    total += square
    sum += square - (i - from >= width ? envelope[i - width] * envelope[i - width] : 0)
    if (sum > largest) largest = sum
  }
  return largest / total
}

/** Lagged products of the baseband within the episodes, complex, lags 0..lags. */
function maskedAutocovariance(a: Float64Array, spans: [number, number][], lags: number): Float64Array {
  const out = new Float64Array(2 * (lags + 1))
  for (const [from, to] of spans) {
    for (let lag = 0; lag <= lags; lag++) {
      let re = 0, im = 0
      for (let i = from; i + lag < to; i++) {
        const ar = a[2 * i], ai = a[2 * i + 1], br = a[2 * (i + lag)], bi = a[2 * (i + lag) + 1]
        re += ar * br + ai * bi
        im += ar * bi - ai * br
      }
      out[2 * lag] += re
      out[2 * lag + 1] += im
    }
  }
  return out
}

/** Autocorrelation of the band itself on a grid of LAGS to a period: the baseband's is smooth, so it is interpolated. */
function fineAutocorrelation(covariance: Float64Array, perPeriod: number): Float64Array {
  const last = covariance.length / 2 - 1
  const count = Math.min(PERIODS * LAGS, Math.floor(last / perPeriod * LAGS))
  const acf = new Float64Array(count + 1)
  for (let i = 0; i <= count; i++) {
    const at = i * perPeriod / LAGS
    const j = Math.min(Math.floor(at), last - 1), part = at - j
    const re = covariance[2 * j] * (1 - part) + covariance[2 * j + 2] * part
    const im = covariance[2 * j + 1] * (1 - part) + covariance[2 * j + 3] * part
    const angle = 2 * Math.PI * i / LAGS
    acf[i] = (re * Math.cos(angle) - im * Math.sin(angle)) / covariance[0]
  }
  return acf
}

/**
 * Deviation of the frequency from the carrier, cycles per baseband sample, from the phase of the autocovariance at the
 * longest lag that is still coherent; standard error from the scatter between stretches of eight periods.
 */
function phaseSlope(covariance: Float64Array, smooth: Float64Array, spans: [number, number][], perPeriod: number): { offset: number, standardError: number } {
  const most = Math.min(Math.round(5 * perPeriod), covariance.length / 2 - 1)
  let offset = 0
  for (let lag = 1; lag <= most; lag++) {
    const re = covariance[2 * lag], im = covariance[2 * lag + 1]
    if (lag > 1 && Math.hypot(re, im) < 0.5 * covariance[0]) break
    // Nearest branch to the estimate so far: long lags turn more than once.
    const turns = Math.atan2(im, re) / (2 * Math.PI)
    offset = (turns + Math.round(offset * lag - turns)) / lag
  }
  const block = Math.round(8 * perPeriod), lag = Math.round(2 * perPeriod)
  const values: number[] = []
  let cycles = 0
  for (const [from, to] of spans) {
    cycles += (to - from) / perPeriod
    for (let begin = from; begin + block <= to; begin += block) {
      let re = 0, im = 0
      for (let i = begin; i + lag < begin + block; i++) {
        re += smooth[2 * i] * smooth[2 * (i + lag)] + smooth[2 * i + 1] * smooth[2 * (i + lag) + 1]
        im += smooth[2 * i] * smooth[2 * (i + lag) + 1] - smooth[2 * i + 1] * smooth[2 * (i + lag)]
      }
      values.push(Math.atan2(im, re) / (2 * Math.PI * lag))
    }
  }
  // Too few stretches for a scatter: a tenth of a cycle over the whole length.
  if (values.length < 3) return { offset, standardError: 0.1 / (cycles * perPeriod) }
  const mean = values.reduce((s, v) => s + v, 0) / values.length
  const spread = Math.sqrt(values.reduce((s, v) => s + (v - mean) ** 2, 0) / (values.length - 1))
  return { offset, standardError: spread / Math.sqrt(values.length) }
}

/** Mean cycle over the first samples of the longest episodes, the slow part taken off by a mean over one period. */
function meanCycle(error: Float64Array, smooth: Float64Array, spans: [number, number][], { frequency, stride, period }: { frequency: number, stride: number, period: number }) {
  const signal: number[] = [], phase: number[] = []
  const half = Math.max(1, Math.round(period / 2))
  for (const [from, to] of [...spans].sort((p, q) => q[1] - q[0] - p[1] + p[0])) {
    const begin = Math.max(0, Math.ceil(from * stride)), end = Math.min(error.length, Math.floor(to * stride))
    let sum = 0, count = 0
    const add = (i: number, sign: number, weight: number) => { const v = error[i]; if (v === v) { sum += sign * weight * v; count += sign * weight } }
    for (let i = begin; i < Math.min(end, begin + 2 * half); i++) add(i, 1, 1)
    for (let i = begin + half; i + half < end; i++) {
      if (signal.length >= CYCLE_SAMPLES) return waveform(Float64Array.from(signal), Float64Array.from(phase))
      const at = i / stride
      const j = Math.min(Math.floor(at), smooth.length / 2 - 2), part = at - j
      const re = smooth[2 * j] * (1 - part) + smooth[2 * j + 2] * part
      const im = smooth[2 * j + 1] * (1 - part) + smooth[2 * j + 3] * part
      signal.push(count > half ? error[i] - sum / count : Number.NaN)
      phase.push(2 * Math.PI * frequency * i + Math.atan2(im, re))
      add(i - half, -1, 1)
      add(i + half, 1, 1)
    }
  }
  return waveform(Float64Array.from(signal), Float64Array.from(phase))
}

function overlapShare(one: Candidate, other: Candidate): number {
  let inside = 0, length = 0
  for (const [from, to] of one.spans) {
    length += to - from
    for (const [begin, end] of other.spans) inside += Math.max(0, Math.min(to, end) - Math.max(from, begin))
  }
  return inside / length
}

/** Whole multiple of another's frequency, also one folded back by the sampling, smaller, and only there while the other is. */
function isHarmonic(one: Candidate, other: Candidate): boolean {
  if (one.fundamental > 0.8 * other.fundamental || overlapShare(one, other) < 0.7) return false
  const ratio = one.frequency / other.frequency, order = Math.round(ratio)
  if (order >= 2 && Math.abs(ratio - order) < Math.min(0.04 * order, 0.15)) return true
  const error = other.periodSdS / other.periodS * other.frequency + one.periodSdS / one.periodS * one.frequency
  for (let n = 3; n <= 41; n++) {
    const folded = Math.abs(n * other.frequency - Math.round(n * other.frequency))
    if (n * other.frequency > 0.5 && Math.abs(folded - one.frequency) < Math.min(0.005, 0.001 + n * error) && one.fundamental < 1.5 / n * other.fundamental) return true
  }
  return false
}

/** Part of the same broad peak. */
function isTwin(one: Candidate, other: Candidate): boolean {
  return Math.abs(Math.log(one.frequency / other.frequency)) < 0.3 && overlapShare(one, other) > 0.5 && one.regularity < 3
}
