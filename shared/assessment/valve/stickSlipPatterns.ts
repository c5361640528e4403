import { insufficient, type Insufficient } from '../types'

export interface StickSlipPatterns {
  /** share of moves in which the output moves and the process variable stands; above 0.25 sticking */
  index1: number
  /** share of transitions that a sticking valve would make; above 0.25 sticking */
  index2: number
  /** index1 less the transitions that a sticking valve would not make */
  index3: number
  moves: number
}

const FEWEST = 30
/** Thirds of a normal distribution. With the published one standard deviation random data give an index of 0.40. */
const EQUIPROBABLE = 0.4307

/**
 * Qualitative patterns in the plane of process variable over output: each step of either is increasing, steady or
 * decreasing, and a sticking valve leaves a mark in the pairs and their order. O(n).
 *
 * Domain: process variable that follows the valve without much lag (flow, best with the stem position itself); samples
 * thinned so that a period has about 16 to 32 of them. Unrelated random data give 0.25.
 * @param op controller output, finite, length n
 * @param pv process variable, finite, length n
 * @param threshold a step counts as steady within this many standard deviations of the mean step
 * @returns insufficient with fewer than 30 moves or a signal that stands still
 * Source: Yamashita 2006, "An automatic method for detection of valve stiction in process control loops"; equiprobable
 * symbols are ours. Fixture: fixtures/reference/stiction.json.
 */
export function stickSlipPatterns(op: Float64Array, pv: Float64Array, threshold = EQUIPROBABLE): StickSlipPatterns | Insufficient {
  if (op.length !== pv.length) throw new RangeError(`op and pv must have one length, got ${op.length} and ${pv.length}`)
  const a = symbols(op, threshold), b = symbols(pv, threshold)
  if (!a || !b) return insufficient('output or process variable stands still')
  const n = a.length
  let moves = 0, sticks = 0, likely = 0, unlikely = 0
  for (let i = 0; i < n; i++) {
    if (a[i] || b[i]) moves++
    const direction = a[i]
    if (!direction || b[i]) continue
    sticks++
    if (i + 1 === n) continue
    // seen along the direction of the output's move, so that both directions are one rule
    const u = a[i + 1] * direction, y = b[i + 1] * direction
    if (y === 1 && u >= 0) likely++
    else if ((u === -1 && y !== 0) || (u === 0 && y === -1) || (u === 1 && y === -1)) unlikely++
  }
  if (moves < FEWEST) return insufficient(`${moves} moves, ${FEWEST} are needed`)
  return { index1: sticks / moves, index2: likely / moves, index3: (sticks - unlikely) / moves, moves }
}

function symbols(x: Float64Array, threshold: number): Int8Array | null {
  const n = x.length - 1
  if (n < 2) return null
  const mean = (x[n] - x[0]) / n
  let squares = 0
  for (let i = 0; i < n; i++) squares += (x[i + 1] - x[i] - mean) ** 2
  const sd = Math.sqrt(squares / (n - 1))
  if (!(sd > 0)) return null
  return Int8Array.from({ length: n }, (_, i) => { const z = (x[i + 1] - x[i] - mean) / sd; return z > threshold ? 1 : z < -threshold ? -1 : 0 })
}
