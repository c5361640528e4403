/**
 * Stands and jumps in a short record: PV stands away from the set point while the output moves on, then jumps the way the output had asked
 * for, and the output had not moved just then. That is what one stroke of a sticking valve looks like; no rhythm is needed, and no two strokes need be alike.
 *
 * A jump is a local maximum of the step of PV (mean of `width` samples after a rise of `width` samples, less the mean before), above four robust
 * deviations of all steps, five of the noise, 2.5 quanta, and two fifths of the largest jump. Jumps that the set point makes are left out. Between two jumps lies
 * a stand. A jump counts as a slip when in the stand before it, from its last turn on, the output travelled in the direction that asks for the jump (and did not come back by more than a quarter), PV did not
 * follow by more than two fifths of the jump, PV stood on the side from which the jump leads towards the set point, and the output moved at the jump by
 * less than two fifths of that travel. Load upsets fail: they lead away from the set point, or PV came back before the next. Where the process
 * integrates (`bends`), the same is done with PV's slope, because a stem that stands lets PV run on straight, and a slip bends it.
 * Cost O(n). Source: ours, after the phases of a sticking valve (stick, jump) in Choudhury, Thornhill, Shah 2005, Modelling valve stiction.
 */
export interface StandsAndJumps {
  /** jumps with a stand of five widths or more before them, not made by the set point */
  looked: number
  slips: number
  /** medians over the slips; NaN without any */
  /** output's travel in the stand over the jump, both in shares of their spans: at least about 1 / process gain for a sticking valve */
  travel: number
  /** share of the jump that PV had already gone in the stand, in the jump's direction */
  follow: number
  /** follow / travel: the process gain as the stand shows it, 0 for a stem that stands, the true gain (mostly 0.5 to 2) for a sound valve */
  standGain: number
  /** distance to the set point in the stand, over the jump (over the error's rms for bends) */
  offset: number
  /** jump over the step that is just large enough to be one */
  size: number
}

const AWAY = 0.02
const MOST_FOLLOW = 0.4
const MOST_KICK = 0.4
const MOST_BACK = 0.25
const LEAST_TRAVEL = 0.2

export interface StandOptions {
  /** sign of the process gain */
  sign: 1 | -1
  /** standard deviation of PV's noise */
  noise: number
  /** PV's quantisation step, 0: none */
  quantum: number
  pvSpan: number
  opSpan: number
  /** samples in which PV answers the valve, >= 1 */
  width: number
  /** look at PV's slope instead of PV */
  bends: boolean
}

/**
 * @param pv regular samples, finite, length n
 * @param op same length
 * @param sp same length, or null; without set point no jump can be laid to it, and the offset is not asked for
 */
export function standsAndJumps(pv: Float64Array, op: Float64Array, sp: Float64Array | null, options: StandOptions): StandsAndJumps {
  if (pv.length !== op.length || (sp && sp.length !== pv.length)) throw new RangeError(`standsAndJumps: pv, op and sp must have one length, got ${pv.length}, ${op.length} and ${sp ? sp.length : pv.length}`)
  const { sign, width, bends } = options
  if (!(width >= 1)) throw new RangeError(`standsAndJumps: width must be at least 1, got ${width}`)
  const none: StandsAndJumps = { looked: 0, slips: 0, travel: NaN, follow: NaN, standGain: NaN, offset: NaN, size: NaN }
  // what jumps: PV, or its slope over 2 reach samples
  const reach = bends ? Math.max(2, 2 * width) : 0
  const n = pv.length - 2 * reach
  if (n < 12 * width) return none
  const y = bends ? Float64Array.from({ length: n }, (_, i) => (pv[i + 2 * reach] - pv[i]) / (2 * reach)) : pv
  const u = op.subarray(reach, reach + n)
  const s = sp && sp.subarray(reach, reach + n)
  const centre = pv.subarray(reach, reach + n)
  const scale = bends ? Math.SQRT2 / (2 * reach) : 1
  const rise = bends ? 2 * width : width

  const first = width
  const last = n - rise - width
  const step = new Float64Array(n)
  for (let i = first; i <= last; i++) step[i] = mean(y, i + rise, i + rise + width) - mean(y, i - width, i)
  const sizes = step.slice(first, last + 1).map(Math.abs).sort()
  const least = Math.max(4 * 1.4826 * sizes[sizes.length >> 1], 5 * options.noise * scale * Math.sqrt(2 / width), 2.5 * options.quantum * scale)
  if (!(least > 0) || sizes[sizes.length - 1] <= least) return none

  // the largest first, each by itself; then in order of time
  const apart = rise + 2 * width
  const order: number[] = []
  for (let i = first; i <= last; i++) if (Math.abs(step[i]) > least) order.push(i)
  order.sort((a, b) => Math.abs(step[b]) - Math.abs(step[a]))
  const taken: number[] = []
  for (const i of order) if (taken.every(j => Math.abs(i - j) > apart)) taken.push(i)
  taken.sort((a, b) => a - b)
  const own = taken.map(i => !s || !setpointMade(s, i, step[i], width, rise, bends))
  const largest = taken.reduce((m, i, k) => own[k] ? Math.max(m, Math.abs(step[i])) : m, 0)
  let rms = 0
  if (s) for (let i = 0; i < n; i++) rms += (s[i] - centre[i]) ** 2 / n
  rms = Math.sqrt(rms)

  let looked = 0
  const slips: { travel: number, follow: number, offset: number, size: number }[] = []
  taken.forEach((end, k) => {
    const d = step[end]
    const size = Math.abs(d)
    const from = k > 0 ? taken[k - 1] + rise + width : 0
    const length = end - from
    if (!own[k] || size < 0.4 * largest || length < 5 * width) return
    looked++
    const side = Math.sign(d)
    const part = Math.max(1, Math.min(width + 1, length >> 2))
    // since its last turn: before that PV may have followed
    const asked = (i: number) => side * sign * mean(u, i, i + part)
    let turn = from
    for (let i = from; i + part <= end; i++) if (asked(i) < asked(turn)) turn = i
    const reached = asked(end - part)
    let top = reached
    for (let i = turn; i + part <= end; i++) top = Math.max(top, asked(i))
    const travel = reached - asked(turn)
    if (end - turn < 2 * width + part || top - reached > MOST_BACK * travel) return
    const follow = side * (mean(y, end - part, end) - mean(y, turn, turn + part)) / size
    const kick = side * sign * (mean(u, end + rise, end + rise + width) - mean(u, end - width, end))
    const late = Math.max(from, end - 3 * part)
    const offset = s ? side * (mean(s, late, end) - mean(centre, late, end)) / (bends ? rms : size) : NaN
    const relative = bends ? NaN : (travel / options.opSpan) / (size / options.pvSpan)
    if (travel > 0 && !(relative < LEAST_TRAVEL) && !(offset < AWAY) && follow < MOST_FOLLOW && kick < MOST_KICK * travel)
      slips.push({ travel: relative, follow, offset, size: size / least })
  })
  const middle = (of: (j: typeof slips[number]) => number) => median(slips.map(of))
  return { looked, slips: slips.length, travel: middle(j => j.travel), follow: middle(j => j.follow), standGain: middle(j => j.follow / j.travel), offset: middle(j => j.offset), size: middle(j => j.size) }
}

/** The set point moved the same way, by half of the jump, from a little before it on. A bend: the set point moved at all. */
function setpointMade(sp: Float64Array, at: number, d: number, width: number, rise: number, bends: boolean): boolean {
  const n = sp.length
  const moved = sp[Math.min(n - 1, at + rise)] - sp[Math.max(0, at - 2 * width)]
  return bends ? Math.sign(d) * moved > Math.abs(d) * 2 * rise : Math.sign(d) * moved > 0.5 * Math.abs(d)
}

function mean(x: Float64Array, from: number, to: number): number {
  let sum = 0
  for (let i = from; i < to; i++) sum += x[i]
  return sum / (to - from)
}

function median(values: number[]): number {
  if (!values.length) return NaN
  const s = values.sort((a, b) => a - b)
  return s.length % 2 ? s[s.length >> 1] : (s[(s.length >> 1) - 1] + s[s.length >> 1]) / 2
}
