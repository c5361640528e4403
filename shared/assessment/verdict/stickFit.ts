/**
 * Does a sticking stem explain PV better than the controller output itself?
 *
 * One-parameter-family Hammerstein fit: a stem that stays until the output is `breakaway` away from it and then moves to
 * within `slack` of it (He's model with fs, fd), then a first-order lag or an integrator, and a delay, each on a small grid;
 * the best share of PV's variance explained (gain of the sign that the controller's action implies) is compared with the
 * same dynamics on the output without sticking. Signals are freed of slow drift by a moving mean first (stem after sticking).
 * Works without a regular oscillation; where nothing moves or PV follows upsets, neither explains PV and the figures stay near 0.
 * Source: the idea of Srinivasan, Rengaswamy, Narasimhan, Miller 2005, Control loop performance assessment 2. Hammerstein model
 * approach for stiction diagnosis; stem by He, Wang, Pottmann, Qin 2007; grid, output-error form and sign are ours.
 * Cost about 150 passes over at most 1200 samples.
 */
export interface StickFit {
  /** share of variance explained with a sticking stem, 0..1 */
  explained: number
  /** the same with a sound stem */
  linear: number
  /** dead band plus stick band S = fs + fd of the best stem, OP unit */
  band: number
  /** slip jump J = fs - fd */
  jump: number
  /** times the best stem moves after a rest of at least 3 samples */
  moves: number
  /** share of samples in which the best stem rests */
  restShare: number
  samples: number
}

const MOST = 1200
const BREAKAWAY = [0.14, 0.24, 0.36, 0.5, 0.66, 0.84]
const SLACK = [0, 0.5, 0.95]
/** samples; beside them no lag, and an integrator */
const LAGS = [2, 8]

/**
 * @param pv PV, or minus the control error where the set point moves; finite, regular, length n
 * @param op same length
 * @param sign of the process gain: +1 where PV rises with OP, -1 where it falls
 * @param window samples of the moving mean, >= 8
 * @returns null below 100 samples or where PV or OP stands still
 */
export function stickFit(pv: Float64Array, op: Float64Array, sign: 1 | -1, window: number): StickFit | null {
  if (pv.length !== op.length) throw new RangeError(`stickFit: pv and op must have one length, got ${pv.length} and ${op.length}`)
  const n = Math.min(MOST, pv.length)
  if (n < 100) return null
  const from = (pv.length - n) >> 1
  const half = Math.max(4, Math.min(n >> 2, Math.round(window / 2)))
  const y = new Float64Array(n + 3)
  freed(pv.subarray(from, from + n), half, y)
  const u = op.subarray(from, from + n)
  let yy = 0
  for (let i = 0; i < n; i++) yy += y[i] * y[i]
  const range = rangeOf(freed(u, half))
  if (!(yy > 0) || !(range > 0)) return null

  const stem = new Float64Array(n)
  const x = new Float64Array(n)
  const w = new Float64Array(n)
  const [z0, z1, z2, z3] = Array.from({ length: 4 }, () => new Float64Array(n))
  const [decay1, decay2] = LAGS.map(lag => Math.exp(-1 / lag))
  const best = { explained: 0, fs: 0, fd: 0 }
  const share = (zy: number, zz: number) => (zz > 0 && zy * sign > 0 ? (zy * zy) / (zz * yy) : 0)
  const explainedBy = (z: Float64Array): number => {
    // lag and integrator bring slow parts back in
    freed(z, half, w)
    // the delays 0, 1 and 3 in one pass; y ends in zeros
    let zz3 = 0
    let zy0 = 0
    let zy1 = 0
    let zy3 = 0
    for (let i = 0; i < n; i++) {
      const v = w[i]
      if (i < n - 3) zz3 += v * v
      zy0 += v * y[i]
      zy1 += v * y[i + 1]
      zy3 += v * y[i + 3]
    }
    const zz1 = zz3 + w[n - 3] * w[n - 3] + w[n - 2] * w[n - 2]
    const zz0 = zz1 + w[n - 1] * w[n - 1]
    return Math.max(share(zy0, zz0), share(zy1, zz1), share(zy3, zz3))
  }
  const tryStem = (): number => {
    freed(stem, half, x)
    // no lag, two lags and an integrator side by side: none has to wait for its own last step
    let s1 = 0
    let s2 = 0
    let s3 = 0
    for (let i = 0; i < n; i++) {
      const v = x[i]
      z1[i] = s1 = decay1 * s1 + (1 - decay1) * v
      z2[i] = s2 = decay2 * s2 + (1 - decay2) * v
      z3[i] = s3 += v
    }
    z0.set(x)
    return Math.max(explainedBy(z0), explainedBy(z1), explainedBy(z2), explainedBy(z3))
  }
  stem.set(u)
  const linear = tryStem()
  for (const b of BREAKAWAY) {
    for (const s of SLACK) {
      const fs = b * range
      const fd = s * fs
      if (fs + fd > 1.05 * range) continue
      moveStem(u, stem, fs, fd)
      const r = tryStem()
      if (r > best.explained) Object.assign(best, { explained: r, fs, fd })
    }
  }
  moveStem(u, stem, best.fs, best.fd)
  let rests = 0
  let run = 0
  let moves = 0
  for (let i = 1; i < n; i++) {
    if (stem[i] === stem[i - 1]) {
      rests++
      run++
    }
    else {
      if (run >= 3) moves++
      run = 0
    }
  }
  return { explained: best.explained, linear, band: best.fs + best.fd, jump: best.fs - best.fd, moves, restShare: rests / (n - 1), samples: n }
}

function moveStem(u: Float64Array, stem: Float64Array, fs: number, fd: number): void {
  let x = u[0]
  for (let i = 0; i < u.length; i++) {
    const gap = u[i] - x
    if (gap > fs) x = u[i] - fd
    else if (gap < -fs) x = u[i] + fd
    stem[i] = x
  }
}

/** Less its centred moving mean over 2 half + 1 samples, fewer at the ends. */
function freed(x: Float64Array, half: number, out = new Float64Array(x.length)): Float64Array {
  const n = x.length
  let sum = 0
  let count = 0
  for (let i = 0; i < Math.min(n, half); i++) {
    sum += x[i]
    count++
  }
  let i = 0
  for (; i <= half && i + half < n; i++) {
    sum += x[i + half]
    count++
    out[i] = x[i] - sum / count
  }
  // the middle: one in, one out
  for (; i + half < n; i++) {
    sum += x[i + half]
    sum -= x[i - half - 1]
    out[i] = x[i] - sum / count
  }
  for (; i < n; i++) {
    if (i - half - 1 >= 0) {
      sum -= x[i - half - 1]
      count--
    }
    out[i] = x[i] - sum / count
  }
  return out
}

/** 5 % to 95 % quantile, widened to the full swing of a triangle. */
function rangeOf(x: Float64Array): number {
  const s = x.slice().sort()
  return (s[Math.floor(0.95 * (s.length - 1))] - s[Math.floor(0.05 * (s.length - 1))]) / 0.9
}
