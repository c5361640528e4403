/**
 * Does a sticking stem explain the straight runs and bends of a level better than the output itself? For short records of integrating processes.
 *
 * Output-error fit PV = c0 + c1 t + g (sum of the stem), c1 standing for a constant load, with stems of He's model (breakaway fs, dynamic friction
 * fd, where it stood at first) on a grid over the output's range, against the same with the output itself in the stem's place. g must have the process gain's sign.
 * Cost: 85 passes over n samples. Source: stem by He, Wang, Pottmann, Qin 2007; the Hammerstein idea of Srinivasan, Rengaswamy,
 * Narasimhan, Miller 2005; grid and trend are ours.
 */
export interface StickRuns {
  /** ln of the variance that the output itself leaves over that which the best stem leaves, >= 0 */
  gain: number
  /** share of PV's variance about its straight line that the best stem explains */
  explained: number
}

const BREAKAWAY = [0.05, 0.1, 0.17, 0.26, 0.37, 0.5, 0.66]
const SLACK = [0, 0.45, 0.9]
const START = [-0.9, -0.35, 0.35, 0.9]

/**
 * @param pv regular, finite, length n
 * @param op same length
 * @param sign of the process gain
 * @returns null below 60 samples or where PV or OP stands still
 */
export function stickRuns(pv: Float64Array, op: Float64Array, sign: 1 | -1): StickRuns | null {
  if (pv.length !== op.length) throw new RangeError(`stickRuns: pv and op must have one length, got ${pv.length} and ${op.length}`)
  const n = pv.length
  if (n < 60) return null
  const y = offLine(pv)
  let yy = 0
  for (let i = 0; i < n; i++) yy += y[i] * y[i]
  const sorted = op.slice().sort()
  const range = sorted[Math.floor(0.99 * (n - 1))] - sorted[Math.floor(0.01 * (n - 1))]
  if (!(yy > 0) || !(range > 0)) return null
  const sum = new Float64Array(n)
  const share = (stem: ArrayLike<number>): number => {
    let state = 0
    for (let i = 0; i < n; i++) {
      sum[i] = state
      state += stem[i] - op[0]
    }
    const x = offLine(sum)
    let xx = 0
    let xy = 0
    for (let i = 0; i < n; i++) {
      xx += x[i] * x[i]
      xy += x[i] * y[i]
    }
    return xx > 0 && xy * sign > 0 ? (xy * xy) / (xx * yy) : 0
  }
  const sound = share(op)
  let best = sound
  const stem = new Float64Array(n)
  for (const b of BREAKAWAY) {
    const fs = b * range
    for (const s of SLACK) {
      for (const start of START) {
        let x = op[0] + start * fs
        for (let i = 0; i < n; i++) {
          const gap = op[i] - x
          if (gap > fs) x = op[i] - s * fs
          else if (gap < -fs) x = op[i] + s * fs
          stem[i] = x
        }
        best = Math.max(best, share(stem))
      }
    }
  }
  return { gain: Math.log((1 - sound) / Math.max(1e-4, 1 - best)), explained: best }
}

/** Less its least-squares straight line. */
function offLine(x: Float64Array): Float64Array {
  const n = x.length
  const middle = (n - 1) / 2
  let mean = 0
  let slope = 0
  for (let i = 0; i < n; i++) {
    mean += x[i] / n
    slope += (i - middle) * x[i]
  }
  slope /= (n * (n * n - 1)) / 12
  return x.map((v, i) => v - mean - slope * (i - middle))
}
