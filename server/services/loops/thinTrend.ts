import { MODE_UNKNOWN, type DaySamples } from '../../../db/blocks/types'

export interface ThinTrend { t: number[], pv: (number | null)[], sp: (number | null)[], op: (number | null)[], mode: (string | null)[] }

/**
 * Thins samples for drawing to at most `points` rows. Every row is a real sample: of each stretch of time those where a
 * signal is least and greatest, so that no peak is lost, and the samples beside a gap. A gap (over 5 usual intervals)
 * that would show is one row of nulls, so that no line is drawn across it.
 * @param points 10..2000
 */
export function thinTrend(samples: DaySamples, points: number): ThinTrend {
  const { t } = samples
  const n = t.length
  const gapMs = 5 * usualInterval(t)
  if (n <= points) {
    const all = withGaps(samples, Int32Array.from(t, (_, i) => i), gapMs, gapMs)
    if (all.t.length <= points) return all
  }
  const signals = (['pv', 'op', 'sp'] as const).map(key => samples[key]).filter(x => x !== null)
  const span = n > 0 ? t[n - 1] - t[0] : 0
  for (let buckets = Math.floor(points / (2 * Math.max(1, signals.length) - (signals.length > 2 ? 2 : 0)));; buckets = Math.floor(buckets * 0.8)) {
    if (buckets < 1) return { t: [], pv: [], sp: [], op: [], mode: [] }
    const width = span / buckets || 1
    const picked = pick(samples, signals, width, gapMs)
    const thin = withGaps(samples, picked, gapMs, width / 2)
    if (thin.t.length <= points) return thin
  }
}

function pick({ t }: DaySamples, signals: Float64Array[], width: number, gapMs: number): Int32Array {
  const n = t.length
  const keep: number[] = []
  const found: number[] = []
  for (let from = 0; from < n;) {
    const end = t[0] + (Math.floor((t[from] - t[0]) / width) + 1) * width
    let to = from + 1
    while (to < n && t[to] < end) to++
    found.length = 0
    for (const x of signals) {
      let least = -1
      let greatest = -1
      let low = Infinity
      let high = -Infinity
      for (let i = from; i < to; i++) {
        const v = x[i]
        if (v < low) { low = v; least = i }
        if (v > high) { high = v; greatest = i }
      }
      if (least >= 0) found.push(least)
      if (greatest >= 0 && greatest !== least) found.push(greatest)
    }
    for (let i = from; i < to; i++) {
      if (gapMs > 0 && width < 4 * gapMs && ((i > 0 && t[i] - t[i - 1] > gapMs) || (i + 1 < n && t[i + 1] - t[i] > gapMs))) found.push(i)
    }
    if (found.length === 0) found.push(from)
    found.sort((a, b) => a - b)
    for (const i of found) if (keep[keep.length - 1] !== i) keep.push(i)
    from = to
  }
  return Int32Array.from(keep)
}

function withGaps(samples: DaySamples, picked: Int32Array, gapMs: number, visibleMs: number): ThinTrend {
  const { t, pv, sp, op, mode, modeNames } = samples
  const out: ThinTrend = { t: [], pv: [], sp: [], op: [], mode: [] }
  const value = (x: Float64Array | null, i: number) => x && x[i] === x[i] ? x[i] : null
  for (let k = 0; k < picked.length; k++) {
    const i = picked[k]
    if (k > 0 && gapMs > 0) {
      const before = picked[k - 1]
      // somewhere between the two the record has a gap
      for (let j = before; j < i; j++) {
        if (t[j + 1] - t[j] <= Math.max(gapMs, visibleMs)) continue
        out.t.push(t[j] + 1)
        out.pv.push(null)
        out.sp.push(null)
        out.op.push(null)
        out.mode.push(null)
        break
      }
    }
    out.t.push(t[i])
    out.pv.push(value(pv, i))
    out.sp.push(value(sp, i))
    out.op.push(value(op, i))
    out.mode.push(mode && mode[i] !== MODE_UNKNOWN ? modeNames[mode[i]] ?? null : null)
  }
  return out
}

/** Median spacing of up to 1,000 neighbours, ms. */
function usualInterval(t: Float64Array): number {
  const n = t.length
  if (n < 2) return 0
  const step = Math.max(1, Math.floor((n - 1) / 1000))
  const gaps: number[] = []
  for (let i = 1; i < n; i += step) gaps.push(t[i] - t[i - 1])
  gaps.sort((a, b) => a - b)
  return gaps[gaps.length >> 1]
}
