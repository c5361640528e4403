/**
 * Averages the native record down to the analysis interval and cuts it into segments that the methods can use:
 * the loop in a normal mode, OP not at a limit, no long gap.
 *
 * Analysis interval = whole multiple of the native one nearest below settling / 30, never finer than native.
 * A block counts when at least half of its slots do. Gaps of up to 5 blocks inside a segment are bridged linearly
 * (for spectra and correlations only; the error measures never see a bridged value) and counted.
 * Source: our definitions; averaging down as in Thornhill, Oettinger, Fedenczuk 1999, Refinery-wide control loop
 * performance assessment (closed-loop response over within about 30 samples).
 */
import { AT_HIGH, AT_LOW, FROZEN, OFF_NORMAL, SHORT_GAP_INTERVALS, type PreparedRecord } from './prepareRecord'

const GAP_BLOCKS = 64

export interface AnalysisSeries {
  intervalS: number
  /** native slots in a block */
  factor: number
  /** begin of each block, epoch ms */
  t: Float64Array
  /** SP - PV; where there is no SP: mean of PV - PV. Bridged inside segments, NaN outside */
  error: Float64Array
  pv: Float64Array
  op: Float64Array | null
  sp: Float64Array | null
  /** index pairs [begin, end), in time order, each at least `minimum` blocks long */
  segments: { begin: number, end: number }[]
  /** blocks inside segments */
  used: number
  bridged: number
}

/**
 * @param prepared native record with its flags
 * @param settlingS settling horizon of the loop, s, > 0
 * @param options `keepLimits`: leave samples at an output limit in (loops without another chance); `factor`: own multiple
 */
export function analysisSeries(prepared: PreparedRecord, settlingS: number, options: { keepLimits?: boolean, factor?: number, minimum?: number } = {}): AnalysisSeries {
  if (!(settlingS > 0)) throw new RangeError(`analysisSeries: settlingS must be above 0, got ${settlingS}`)
  const factor = options.factor ?? Math.max(1, Math.floor(settlingS / 30 / prepared.intervalS + 1e-9) || 1)
  const minimum = options.minimum ?? 20
  const drop = OFF_NORMAL | FROZEN | (options.keepLimits ? 0 : AT_LOW | AT_HIGH)
  const blockMs = factor * prepared.intervalS * 1000
  // a long gap stands in the series as empty blocks, at most GAP_BLOCKS of them: an index is no clock across it
  const gapBlocks = prepared.stretches.map((s, k) => k === 0 ? 0 : Math.max(SHORT_GAP_INTERVALS + 1, Math.min(GAP_BLOCKS, Math.round((prepared.t[s.begin] - prepared.t[s.begin - 1]) / blockMs))))
  let blocks = 0
  prepared.stretches.forEach((s, k) => { blocks += gapBlocks[k] + Math.floor((s.end - s.begin) / factor) })

  const { pv, sp, op, error, flags } = prepared
  const t = new Float64Array(blocks)
  const bPv = new Float64Array(blocks)
  const bOp = op ? new Float64Array(blocks) : null
  const bSp = sp ? new Float64Array(blocks) : null
  const bError = error ? new Float64Array(blocks) : null
  const breaks: number[] = []
  const need = Math.max(1, factor / 2)
  let b = 0
  for (let k = 0; k < prepared.stretches.length; k++) {
    const s = prepared.stretches[k]
    for (let g = 0; g < gapBlocks[k]; g++, b++) {
      t[b] = prepared.t[s.begin - 1] + (g + 1) * prepared.intervalS * 1000
      bPv[b] = NaN
      if (bOp) bOp[b] = NaN
      if (bSp) bSp[b] = NaN
      if (bError) bError[b] = NaN
    }
    breaks.push(b)
    const m = Math.floor((s.end - s.begin) / factor)
    for (let j = 0; j < m; j++, b++) {
      const i0 = s.begin + j * factor
      t[b] = prepared.t[i0]
      let count = 0
      let sumPv = 0
      let sumOp = 0
      let sumSp = 0
      let sumError = 0
      for (let i = i0; i < i0 + factor; i++) {
        if ((flags[i] & drop) !== 0) continue
        const x = pv[i]
        const e = error ? error[i] : 0
        const o = op ? op[i] : 0
        if (x !== x || e !== e || o !== o) continue
        count++
        sumPv += x
        sumOp += o
        sumError += e
        if (sp) sumSp += sp[i]
      }
      const ok = count >= need
      bPv[b] = ok ? sumPv / count : NaN
      if (bOp) bOp[b] = ok ? sumOp / count : NaN
      if (bSp) bSp[b] = ok ? sumSp / count : NaN
      if (bError) bError[b] = ok ? sumError / count : NaN
    }
  }
  breaks.push(b)

  const segments: { begin: number, end: number }[] = []
  let used = 0
  let bridged = 0
  for (let k = 0; k + 1 < breaks.length; k++) {
    let begin = -1
    let lastGood = -1
    const close = () => {
      if (begin >= 0) {
        if (lastGood + 1 - begin >= minimum) {
          segments.push({ begin, end: lastGood + 1 })
          used += lastGood + 1 - begin
        }
        begin = -1
      }
    }
    for (let i = breaks[k]; i < breaks[k + 1]; i++) {
      if (bPv[i] !== bPv[i]) continue
      if (begin >= 0 && i - lastGood > SHORT_GAP_INTERVALS) close()
      if (begin < 0) begin = i
      else if (i - lastGood > 1) {
        for (let g = lastGood + 1; g < i; g++) {
          const w = (g - lastGood) / (i - lastGood)
          for (const a of [bPv, bOp, bSp, bError]) if (a) a[g] = a[lastGood] + w * (a[i] - a[lastGood])
          bridged++
        }
      }
      lastGood = i
    }
    close()
  }

  let e = bError
  if (!e) {
    let sum = 0
    for (const s of segments) for (let i = s.begin; i < s.end; i++) sum += bPv[i]
    const mean = used > 0 ? sum / used : 0
    e = new Float64Array(blocks)
    for (let i = 0; i < blocks; i++) e[i] = mean - bPv[i]
  }
  return { intervalS: factor * prepared.intervalS, factor, t, error: e, pv: bPv, op: bOp, sp: bSp, segments, used, bridged }
}
