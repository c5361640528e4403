/**
 * How slowly the control error goes back to zero, and how much of it no controller could remove.
 *
 * On the analysis series: lag at which the autocorrelation falls below 1/e (interpolated), mean stay on one side of zero, share
 * of variance in the first differences' white part. Set-point steps are part of the error like any upset.
 * Cost O(n log n). Source: ours; the decay of the error's autocorrelation against the settling horizon (methods: sluggish).
 */
import { autocorrelation } from '../statistics/autocorrelation'
import type { AnalysisSeries } from '../preparation/analysisSeries'

export interface ErrorCharacter {
  /** s */
  decayS: number
  /** s; mean time between changes of side, swings below a tenth of the deviation left out */
  staySideS: number
  /** 1 - (lag-1 autocorrelation), at least 0: about 1 for white noise */
  whiteness: number
  /** standard deviation of the error */
  deviation: number
  /** kurtosis of the error: 3 normal, 1.5 sine, large when it is mostly quiet with rare upsets */
  kurtosis: number
}

export function errorCharacter(series: AnalysisSeries): ErrorCharacter | null {
  const longest = series.segments.reduce<{ begin: number, end: number } | null>((a, b) => (a && a.end - a.begin >= b.end - b.begin ? a : b), null)
  if (!longest || longest.end - longest.begin < 64) return null
  const x = series.error.subarray(longest.begin, Math.min(longest.end, longest.begin + 16_384))
  const n = x.length
  const r = autocorrelation(x, Math.min(n - 1, Math.max(60, Math.min(1500, n >> 3))))
  if (!(r[0] === r[0])) return null
  let k = 1
  while (k < r.length - 1 && r[k] > 1 / Math.E) k++
  const part = r[k - 1] > r[k] ? Math.min(1, Math.max(0, (r[k - 1] - 1 / Math.E) / (r[k - 1] - r[k]))) : 0
  let mean = 0
  for (let i = 0; i < n; i++) mean += x[i]
  mean /= n
  let m2 = 0
  let m4 = 0
  for (let i = 0; i < n; i++) {
    const d = (x[i] - mean) ** 2
    m2 += d
    m4 += d * d
  }
  m2 /= n
  m4 /= n
  const band = 0.1 * Math.sqrt(m2)
  let side = 0
  let changes = 0
  for (let i = 0; i < n; i++) {
    const d = x[i] - mean
    const s = d > band ? 1 : d < -band ? -1 : 0
    if (s !== 0 && s !== side) {
      if (side !== 0) changes++
      side = s
    }
  }
  return {
    decayS: (k - 1 + part) * series.intervalS,
    staySideS: (n / (changes + 1)) * series.intervalS,
    whiteness: Math.max(0, 1 - r[1]),
    deviation: Math.sqrt(m2),
    kurtosis: m4 / (m2 * m2),
  }
}
