/**
 * How the raw readings of PV behave: their noise, whether it comes in bursts, and single wild samples.
 *
 * Noise from the median absolute second difference of pieces (white noise: 0.6745 sqrt 6 sigma); a piece is `pieceLength`
 * samples, at most 80 pieces are looked at. Wild: a sample that stands off the mean of its neighbours by more than 8 sigma and
 * 5 % of span, while the neighbours agree within half of that. Cost O(n). Source: ours; the constant is that of the normal distribution.
 */
import type { PreparedRecord } from '../preparation/prepareRecord'
import { select } from '../statistics/select'

export interface ReadingCharacter {
  /** median noise over the pieces, PV unit */
  noise: number
  /** 95 % quantile over the pieces */
  loudest: number
  /** share of pieces whose noise exceeds 5 x the quietest tenth */
  burstShare: number
  /** loudest over the 10 % quantile */
  burstRatio: number
  /** share of samples */
  wildShare: number
}

export function readingCharacter(prepared: PreparedRecord, pvSpan: number, quantum: number): ReadingCharacter {
  const { pv, n } = prepared
  const pieceLength = 240
  const pieces = Math.floor(n / pieceLength)
  const stride = Math.max(1, Math.ceil(pieces / 80))
  const scratch = new Float64Array(pieceLength)
  const levels: number[] = []
  const scale = 0.6745 * Math.sqrt(6)
  for (let p = 0; p < Math.max(1, pieces); p += stride) {
    const from = p * pieceLength
    let k = 0
    for (let i = Math.max(1, from); i < Math.min(n - 1, from + pieceLength); i++) {
      const d = Math.abs(pv[i + 1] - 2 * pv[i] + pv[i - 1])
      if (d === d) scratch[k++] = d
    }
    if (k < Math.min(40, n / 2)) continue
    levels.push(select(scratch.subarray(0, k), k >> 1) / scale)
  }
  if (!levels.length) return { noise: NaN, loudest: NaN, burstShare: NaN, burstRatio: NaN, wildShare: NaN }
  levels.sort((a, b) => a - b)
  const q = (f: number) => levels[Math.round(f * (levels.length - 1))]
  const floor = Math.max(quantum / 2, 1e-5 * pvSpan)
  const noise = q(0.5)
  const quiet = Math.max(q(0.1), floor)

  const limit = Math.max(8 * Math.max(noise, floor), 0.05 * pvSpan)
  let wild = 0
  let seen = 0
  for (let i = 1; i + 1 < n; i++) {
    const d = Math.abs(pv[i] - (pv[i - 1] + pv[i + 1]) / 2)
    if (d !== d) continue
    seen++
    if (d > limit && Math.abs(pv[i + 1] - pv[i - 1]) < limit / 2) wild++
  }
  return {
    noise,
    loudest: q(0.95),
    burstShare: levels.filter(v => v > 5 * quiet).length / levels.length,
    burstRatio: Math.max(q(0.95), floor) / quiet,
    wildShare: seen > 0 ? wild / seen : NaN,
  }
}
