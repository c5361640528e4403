import { fft } from '../spectrum/fft'

export interface SpectralPeak {
  /** cycles per sample */
  frequency: number
  /** how far above its limit, in natural logarithms, weighted by the square root of the segments; > 0 */
  score: number
}

/** Cycles in a segment between which a peak is looked for; each period is thus seen at two segment lengths. */
const FEWEST_CYCLES = 6
const MOST_CYCLES = 24
/** A peak must stand this far above its surroundings however long the average; noise through a well damped loop does not. */
const LOWEST_RATIO = Math.log(4)
/** Normal quantile by which short averages must exceed a part of that ratio, because a single look is exponentially distributed. */
const QUANTILE = 3.5
/** Bins that matter at any length. */
const BINS = 2 * MOST_CYCLES + 1
/**
 * Longest transform: longer segments are looked at in a record thinned to every 2nd, 4th, … sample, as only their lowest
 * bins matter. 256 keeps them below a fifth of the thinned sampling frequency, where `thinned` passes 0.998 and lets in less than -56 dB.
 */
const LONGEST = 256
/** Bins either side of a peak at bin k that are its own. */
const AWAY = Int32Array.from({ length: BINS }, (_, k) => Math.max(2, Math.round(0.2 * k)))
/** Far above the rounding of running sums of inverse powers. */
const SLACK = 0.2
/** Two peaks nearer than this (logarithm of the ratio) are one unless a dip lies between them. */
const NEAR = 0.6

/**
 * Spectral peaks that stand above both sides of their surroundings, at several segment lengths and in averages of 1, 2, 4, …
 * up to all segments, so that a short stretch of hunting is found as well as a weak lasting one.
 *
 * Takes the differences of the signal: then a random walk is flat and a step is one sample. The background at bin k is the
 * mean of the logarithms over both sides (k/2 to k, k to 2k), which leaves any power-law slope without effect.
 * @param steps differences, 0 where missing, length n
 * @param present 1 where the sample is there, length n
 * @param highestPeriod samples
 * @returns strongest first, at least 15 % apart, at most 8
 * Cost O(n) up to length 256, then half as much for each further doubling. Source: Welch 1967 for the averaging; the rule for a peak is ours, its limits are checked on noise.
 */
export function spectralPeaks(steps: Float64Array, present: Uint8Array, highestPeriod: number): SpectralPeak[] {
  const found: SpectralPeak[] = []
  const averages: Average[] = []
  const there = countsOf(present)
  let record = withSums(steps, steps.length, 1)
  for (let length = 64; length <= steps.length; length *= 2) {
    if (length / MOST_CYCLES > highestPeriod) break
    if (length / record.factor > LONGEST) record = thinned(record)
    averages.push(searchLength(record, there, length, highestPeriod, found))
  }
  found.sort((a, b) => b.score - a.score)
  const kept: SpectralPeak[] = []
  for (const peak of found) {
    if (kept.length === 8) break
    if (kept.every(other => areApart(peak.frequency, other.frequency, averages))) kept.push(peak)
  }
  return kept
}

/** Mean spectrum over the whole record at one segment length. */
interface Average { length: number, power: Float64Array, segments: number }

/** Whether a dip lies between two frequencies, deeper than chance makes in a smooth peak. */
function areApart(one: number, other: number, averages: Average[]): boolean {
  const distance = Math.abs(Math.log(one / other))
  if (distance > NEAR) return true
  if (distance < 0.15) return false
  const low = Math.min(one, other), high = Math.max(one, other)
  const average = averages.findLast(a => high * a.length < a.power.length - 1)
  if (!average) return false
  const { length, power, segments } = average
  const at = (frequency: number) => { const k = Math.round(frequency * length); return Math.max(power[k - 1], power[k], power[k + 1]) }
  let dip = Infinity
  for (let k = Math.round(low * length) + 1; k < Math.round(high * length); k++) dip = Math.min(dip, power[k])
  return Math.log(Math.min(at(low), at(high)) / dip) > Math.log(4) + 3 * Math.sqrt(2 / segments)
}

/** A record at every `factor`-th sample. */
interface Record { x: Float64Array, n: number, factor: number, sum: Float64Array }

/** Kept for the next call, like all working memory here: fresh memory costs more than the sums. */
const pools: Float64Array[] = []
const memory = (slot: number, length: number): Float64Array => pools[slot]?.length >= length ? pools[slot] : pools[slot] = new Float64Array(length)

/** Running totals before each index: of the values, and of the samples that are there. */
function withSums(x: Float64Array, n: number, factor: number): Record {
  const sum = memory(factor === 1 ? 0 : 1, n + 1)
  sum[0] = 0
  for (let i = 0; i < n; i++) sum[i + 1] = sum[i] + x[i]
  return { x, n, factor, sum }
}

let pooledCount = new Int32Array(1)

function countsOf(present: Uint8Array): Int32Array {
  if (pooledCount.length <= present.length) pooledCount = new Int32Array(present.length + 1)
  for (let i = 0; i < present.length; i++) pooledCount[i + 1] = pooledCount[i] + present[i]
  return pooledCount
}

/** Half-band interpolation kernel of Deslauriers and Dubuc (1989), order 8: flat at 0, eight zeros at half the sampling frequency. */
const [H0, H1, H3, H5, H7] = [2048 / 4096, 1225 / 4096, -245 / 4096, 49 / 4096, -5 / 4096]

/** Every second sample of the record behind a low pass; zeros beyond the ends. */
function thinned({ x, n, factor }: Record): Record {
  const half = n >> 1
  // two in turn: one is read while the other is written
  const slot = 2 + (Math.log2(factor) & 1)
  const y = memory(slot, half)
  for (let m = 0; m < half; m++) {
    const i = 2 * m
    y[m] = i >= 7 && i + 7 < n
      ? H0 * x[i] + H1 * (x[i - 1] + x[i + 1]) + H3 * (x[i - 3] + x[i + 3]) + H5 * (x[i - 5] + x[i + 5]) + H7 * (x[i - 7] + x[i + 7])
      : atEnd(x, n, i)
  }
  return withSums(y, half, 2 * factor)
}

function atEnd(x: Float64Array, n: number, i: number): number {
  const at = (j: number) => j >= 0 && j < n ? x[j] : 0
  return H0 * at(i) + H1 * (at(i - 1) + at(i + 1)) + H3 * (at(i - 3) + at(i + 3)) + H5 * (at(i - 5) + at(i + 5)) + H7 * (at(i - 7) + at(i + 7))
}

/** What one transform needs, kept: Hann window, windowed segment, spectrum. */
interface Segment { window: Float64Array, part: Float64Array, spectrum: Float64Array }
const segmentsOf = new Map<number, Segment>()

function segmentOf(length: number): Segment {
  let segment = segmentsOf.get(length)
  if (!segment) {
    const window = Float64Array.from({ length }, (_, i) => 0.5 - 0.5 * Math.cos(2 * Math.PI * (i + 0.5) / length))
    segmentsOf.set(length, segment = { window, part: new Float64Array(length), spectrum: new Float64Array(2 * length) })
  }
  return segment
}

/** Running sums of searchLength. */
let pool = new Float64Array(0)

function searchLength({ x, n, factor, sum }: Record, there: Int32Array, length: number, highestPeriod: number, found: SpectralPeak[]): Average {
  const first = Math.max(FEWEST_CYCLES, Math.ceil(length / highestPeriod))
  const last = Math.min(MOST_CYCLES, length >> 2)
  const bins = Math.min(2 * last, length >> 1) + 1
  // in samples of the thinned record
  const own = length / factor
  const hop = own >> 1
  const segments = Math.floor((n - own) / hop) + 1
  const { window, part, spectrum } = segmentOf(own)
  const transform = fft(own)
  // Running sums over the segments: any average is one difference.
  if (pool.length < (segments + 1) * bins) pool = new Float64Array((segments + 1) * bins)
  const sums = pool.fill(0, 0, bins)
  const used = new Int32Array(segments + 1)
  for (let j = 0; j < segments; j++) {
    // The last segment ends with the record.
    const from = j === segments - 1 ? n - own : j * hop
    const good = there[(from + own) * factor] - there[from * factor] > 0.7 * length
    used[j + 1] = used[j] + (good ? 1 : 0)
    if (good) {
      const mean = (sum[from + own] - sum[from]) / own
      for (let i = 0; i < own; i++) part[i] = (x[from + i] - mean) * window[i]
      transform.forwardHalf(part, spectrum)
    }
    let total = 0
    for (let k = 1, at = j * bins + 1; k < bins; k++, at++) {
      const re = spectrum[2 * k], im = spectrum[2 * k + 1]
      const square = good ? re * re + im * im : 0
      sums[at + bins] = sums[at] + square
      total += square
    }
    // Bin 0 is not looked at: all other bins together stand there.
    sums[(j + 1) * bins] = sums[j * bins] + total
  }
  const power = new Float64Array(bins), logs = new Float64Array(bins + 1), inverse = new Float64Array(bins + 1)
  let limitOf = 0, limit = 0, bound = 0
  for (let width = 1; ; width = Math.min(2 * width, segments)) {
    const stride = Math.max(1, width >> 1)
    for (let from = 0; from + width <= segments; from += stride) {
      const m = used[from + width] - used[from]
      if (m < width / 2) continue
      const begin = from * bins, end = begin + width * bins
      let floor = sums[end] - sums[begin]
      if (!(floor > 0)) continue
      // Rounding of the running sums must not pass for an empty spectrum.
      floor = Math.max(floor, sums[end + bins - 1]) * 1e-13
      for (let k = 1; k < bins; k++) {
        const p = sums[end + k] - sums[begin + k]
        power[k] = p
        inverse[k + 1] = inverse[k] + 1 / (p > floor ? p : floor)
      }
      if (m !== limitOf) {
        limitOf = m
        limit = LOWEST_RATIO + 3 * Math.log(1 - 1 / (9 * m) + QUANTILE / (3 * Math.sqrt(m))) + 1 / (2 * m) + 1 / (12 * m * m)
        bound = Math.exp(2 * limit - SLACK)
      }
      let logged = false
      for (let k = first; k <= last; k++) {
        if (!(power[k] > power[k - 1] && power[k] >= power[k + 1])) continue
        const away = AWAY[k]
        const below = Math.max(1, k >> 1), above = Math.min(bins - 1, 2 * k)
        if (k + away >= above) continue
        // The harmonic mean lies below the geometric one: what does not stand out of it needs no logarithms.
        const sides = (inverse[k - away + 1] - inverse[below]) * (inverse[above + 1] - inverse[k + away])
        if (power[k] * power[k] * sides < bound * (k - away + 1 - below) * (above + 1 - k - away)) continue
        if (!logged) for (let j = 1; j < bins; j++) logs[j + 1] = logs[j] + Math.log(Math.max(power[j], floor))
        logged = true
        const lower = (logs[k - away + 1] - logs[below]) / (k - away + 1 - below)
        const upper = (logs[above + 1] - logs[k + away]) / (above + 1 - k - away)
        const here = logs[k + 1] - logs[k]
        const excess = here - 0.5 * (lower + upper) - limit
        if (excess <= 0) continue
        const left = logs[k] - logs[k - 1], right = logs[k + 2] - logs[k + 1]
        const shift = k + 1 < bins ? 0.5 * (left - right) / (left - 2 * here + right) : 0
        found.push({ frequency: (k + (Number.isFinite(shift) ? shift : 0)) / length, score: excess * Math.sqrt(m) })
      }
    }
    if (width === segments) return { length, power: power.slice(), segments: Math.max(1, used[segments]) }
  }
}
