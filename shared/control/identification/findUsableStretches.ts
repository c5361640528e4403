export interface LoopSamples {
  /** s between samples; evenly spaced, NaN where missing */
  interval: number
  pv: Float64Array
  op: Float64Array
  sp: Float64Array | null
  /** 1 automatic, 0 manual, 255 not known; null: taken as automatic */
  automatic: Uint8Array | null
  opLow: number
  opHigh: number
  /** s, how long the loop takes to settle */
  settlingTime: number
}

export interface UsableStretch {
  /** Samples from (with lead-in) .. to, exclusive; without gaps and limits */
  from: number
  to: number
  kind: 'setpointStep' | 'manualMove' | 'natural'
  /** Largest excursion of OP in the stretch over the noise of OP; how much the stretch has to say. */
  excitation: number
  /** A sentence for the reader. */
  description: string
}

/**
 * Finds stretches of a record that may carry a model: OP moves in manual first, then set-point steps, then automatic
 * stretches in which OP moves by itself much more than its noise. Stretches hold no gaps, no change of mode, and not much
 * time at an output limit. Each starts a settling time before its first move and ends two after its last.
 * @returns best first: manual moves before set-point steps before natural excitation, each by excitation; at most 20
 * @throws RangeError when lengths differ or interval or settling time is not positive
 * Source: moves above 3 standard deviations of the noise from differences, as usual for step detection (common practice, no source).
 */
export function findUsableStretches(samples: LoopSamples): UsableStretch[] {
  const { interval, pv, op, sp, automatic, settlingTime } = samples
  const n = pv.length
  if (op.length !== n || (sp && sp.length !== n) || (automatic && automatic.length !== n)) throw new RangeError('findUsableStretches: the signals differ in length')
  if (!(interval > 0) || !(settlingTime > 0)) throw new RangeError(`findUsableStretches: interval and settling time must be positive, got ${interval}, ${settlingTime}`)
  const settle = Math.max(10, Math.round(settlingTime / interval))
  const span = samples.opHigh - samples.opLow
  const mode = (k: number) => automatic ? automatic[k] : 1
  const found: UsableStretch[] = []

  for (let begin = 0; begin < n;) {
    if (!Number.isFinite(pv[begin]) || !Number.isFinite(op[begin]) || mode(begin) === 255) {
      begin++
      continue
    }
    let end = begin
    while (end < n && Number.isFinite(pv[end]) && Number.isFinite(op[end]) && mode(end) === mode(begin)) end++
    if (end - begin >= 40) scan(begin, end)
    begin = end
  }
  const rank = { manualMove: 0, setpointStep: 1, natural: 2 }
  return found.sort((a, b) => rank[a.kind] - rank[b.kind] || b.excitation - a.excitation).slice(0, 20)

  function scan(begin: number, end: number): void {
    const manual = mode(begin) === 0
    const noise = Math.max(differenceNoise(op, begin, end), 1e-4 * span)
    const moves = manual ? jumps(op, begin, end, Math.max(0.005 * span, 4 * noise)) : sp ? jumps(sp, begin, end, Math.max(1e-9, 3 * differenceNoise(pv, begin, end))) : []
    // A set point that moves all the time (cascade) is not a row of steps, but excitation all the same.
    const steps = moves.length > (end - begin) / 15 ? [] : moves
    for (let i = 0; i < steps.length;) {
      let last = i
      while (last + 1 < steps.length && steps[last + 1] - steps[last] < 3 * settle) last++
      add(Math.max(begin, steps[i] - settle), Math.min(end, steps[last] + 2 * settle), manual ? 'manualMove' : 'setpointStep', noise, steps.slice(i, last + 1))
      i = last + 1
    }
    if (!manual && steps.length === 0) {
      const length = Math.min(end - begin, Math.max(400, 30 * settle))
      for (let from = begin; from + length <= end; from += length) add(from, from + length, 'natural', noise, [])
    }
  }

  function add(from: number, to: number, kind: UsableStretch['kind'], noise: number, steps: number[]): void {
    if (to - from < 40) return
    let low = Infinity
    let high = -Infinity
    let limited = 0
    for (let k = from; k < to; k++) {
      low = Math.min(low, op[k])
      high = Math.max(high, op[k])
      if (op[k] <= samples.opLow + 0.005 * span || op[k] >= samples.opHigh - 0.005 * span) limited++
    }
    // At a limit OP still tells what the valve gets; but a stretch that stands there all the time carries nothing.
    if (limited > 0.5 * (to - from)) return
    const excitation = (high - low) / noise
    if (excitation < (kind === 'natural' ? 15 : 4)) return
    const length = `${Math.round((to - from) * interval)} s`
    const description = kind === 'manualMove'
      ? `${steps.length} OP move${steps.length === 1 ? '' : 's'} in manual, ${length}.`
      : kind === 'setpointStep' ? `${steps.length} set-point change${steps.length === 1 ? '' : 's'}, ${length}.` : `OP moves over ${(high - low).toPrecision(2)} by itself, ${length}; often too little for a model.`
    found.push({ from, to, kind, excitation, description })
  }
}

/** Standard deviation of the noise from the median absolute first difference. */
function differenceNoise(x: Float64Array, from: number, to: number): number {
  const differences = new Float64Array(to - from - 1)
  for (let k = from + 1; k < to; k++) differences[k - from - 1] = Math.abs(x[k] - x[k - 1])
  differences.sort()
  return differences[differences.length >> 1] / 0.6745 / Math.SQRT2
}

/** Samples at which a signal has jumped; a ramp over a few samples counts once. */
function jumps(x: Float64Array, from: number, to: number, size: number): number[] {
  const at: number[] = []
  for (let k = from + 1; k < to; k++) if (Math.abs(x[k] - x[k - 1]) > size && (at.length === 0 || k - at[at.length - 1] > 3)) at.push(k)
  return at
}
