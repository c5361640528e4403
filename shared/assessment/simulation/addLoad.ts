import { noiseSource } from './noiseSource'
import type { LoadPart } from './scenario'

/**
 * Adds one disturbance to `out`, one value per step, beginning at time 0, in OP units at the process input.
 *
 * Coloured noise is a first-order autoregression; where its time constant is long against the step it is drawn on a coarser
 * grid (30 points per time constant) and joined by straight lines. O(length) per part.
 * @param out changed in place, length n
 * @param stepS s, > 0
 * Source: definitions; G. E. P. Box, G. M. Jenkins (1970) Time Series Analysis, for the autoregression's variance.
 */
export function addLoad(part: LoadPart, out: Float64Array, stepS: number): void {
  if (!part.spans) { add(part, out, stepS, 0, out.length); return }
  for (const { fromS, toS } of part.spans) {
    const from = Math.max(0, Math.ceil(fromS / stepS))
    const to = Math.min(out.length, Math.ceil(toS / stepS))
    if (to > from) add(part, out, stepS, from, to)
  }
}

function add(part: LoadPart, out: Float64Array, stepS: number, from: number, to: number): void {
  switch (part.kind) {
    case 'coloured': {
      const random = noiseSource(part.seed)
      const stride = Math.max(1, Math.floor(part.timeConstantS / (30 * stepS)))
      const a = part.timeConstantS > 0 ? Math.exp(-stride * stepS / part.timeConstantS) : 0
      const b = part.standardDeviation * Math.sqrt(1 - a * a)
      let here = part.standardDeviation * random.normal()
      for (let k = 0; k < to; k += stride) {
        const next = a * here + b * random.normal()
        const slope = (next - here) / stride
        const end = Math.min(k + stride, to)
        // the noise runs on outside the span, so that the same seed gives the same noise at the same time
        for (let i = Math.max(k, from); i < end; i++) out[i] += here + slope * (i - k)
        here = next
      }
      return
    }
    case 'steps': {
      const { at, size, riseS } = part
      // each rise by itself, then one pass for the levels reached: many steps cost no more than one
      const reached = at.map((time, j) => ({ from: Math.max(0, Math.ceil((time + riseS) / stepS - 1e-9)), size: size[j] })).sort((x, y) => x.from - y.from)
      for (let j = 0; j < at.length; j++) {
        const end = Math.min(to, Math.ceil((at[j] + riseS) / stepS - 1e-9))
        for (let k = Math.max(from, Math.ceil(at[j] / stepS - 1e-9)); k < end; k++) out[k] += size[j] * (k * stepS - at[j]) / riseS
      }
      let level = 0
      let k = from
      for (const { from: begin, size: change } of reached) {
        const end = Math.min(begin, to)
        if (level !== 0) for (; k < end; k++) out[k] += level
        k = Math.max(k, end)
        level += change
      }
      if (level !== 0) for (; k < to; k++) out[k] += level
      return
    }
    case 'pulses':
      for (const at of part.at) {
        const end = at + part.widthS
        const tail = part.recoveryS > 0 ? end + 8 * part.recoveryS : end
        for (let k = Math.max(from, Math.ceil(at / stepS)); k < to && k * stepS < tail; k++)
          out[k] += part.size * (k * stepS < end ? 1 : Math.exp(-(k * stepS - end) / part.recoveryS))
      }
      return
    case 'periodic': {
      const { amplitude, shape, phase } = part
      const perStep = stepS / part.periodS
      for (let k = from; k < to; k++) {
        const turn = k * perStep + phase
        const x = turn - Math.floor(turn)
        out[k] += amplitude * (shape === 'sine' ? Math.sin(2 * Math.PI * x) : shape === 'square' ? (x < 0.5 ? 1 : -1) : x < 0.5 ? 4 * x - 1 : 3 - 4 * x)
      }
      return
    }
    case 'signal': {
      const { values, gain, lagS, delayS } = part
      const last = values.length - 1
      const keep = lagS > 0 ? Math.exp(-stepS / lagS) : 0
      let state = values[0]
      for (let k = 0; k < to; k++) {
        const x = Math.min(Math.max((k * stepS - delayS) / part.stepS, 0), last)
        const i = Math.min(Math.floor(x), last - 1)
        const value = last === 0 ? values[0] : values[i] + (x - i) * (values[i + 1] - values[i])
        state = keep * state + (1 - keep) * value
        if (k >= from) out[k] += gain * state
      }
    }
  }
}
