import { insufficient, type Insufficient } from '../types'
import { averageDown } from './averageDown'
import { outputTurns } from './outputTurns'

export interface StickAndJump {
  /** share of the output's travel made while the process variable stands: 0.25 for two sines, near 1 for a sticking valve */
  standingTravel: number
  /** share of the process variable's travel in its fastest fifth: 0.31 sine, 0.44 noise, near 1 for jumps */
  jumpShare: number
  says: 'sticking' | 'undecided'
}

/** Samples to a period of the output after averaging down. */
const PER_PERIOD = 24
const FEWEST_TURNS = 8
/** Share of the 95 % quantile of its speed below which the process variable stands: 0.25 of the travel between two sines. */
const STILL = 0.25
/** Both shares must lie above: half-way from what sines and noise give to what a sticking valve gives (ours). */
const LIMIT = 0.55

/**
 * Stick-and-jump pattern: the process variable stands while the output travels, then jumps. Needs no regular period, so it
 * is tried where limit cycles are irregular (r < 1) too. Never says `sound`.
 *
 * Domain: process variable that follows the valve within a fraction of the period (flow, fast pressure); at least 8 turns
 * of the output; at least 8 samples from turn to turn and back.
 * @param op controller output, finite, length n
 * @param pv process variable, finite, length n
 * Source: ours, after the description of the phases of a sticking valve by Choudhury, Thornhill, Shah 2005. O(n log n).
 */
export function stickAndJump(op: Float64Array, pv: Float64Array): StickAndJump | Insufficient {
  if (op.length !== pv.length) throw new RangeError(`op and pv must have one length, got ${op.length} and ${pv.length}`)
  const turns = outputTurns(op)
  if (turns.length < FEWEST_TURNS) return insufficient(`${turns.length} turns of the output, ${FEWEST_TURNS} are needed`)
  const period = 2 * (turns[turns.length - 1] - turns[0]) / (turns.length - 1)
  if (period < 8) return insufficient('fewer than 8 samples a period')
  const factor = Math.max(1, Math.round(period / PER_PERIOD))
  const u = averageDown(op, factor), y = averageDown(pv, factor)
  const n = u.length - 1
  const speed = Float64Array.from({ length: n }, (_, i) => Math.abs(y[i + 1] - y[i]))
  const travel = speed.reduce((s, v) => s + v, 0)
  if (!(travel > 0)) return insufficient('the process variable stands still')
  const ranked = speed.slice().sort()
  // Against the speed of its jumps, not its mean speed: noise on a standing process variable must not pass for movement.
  const still = STILL * ranked[Math.floor(0.95 * (n - 1))]
  let total = 0, standing = 0
  for (let i = 0; i < n; i++) {
    const move = Math.abs(u[i + 1] - u[i])
    total += move
    if (speed[i] < still) standing += move
  }
  const fastest = ranked.subarray(n - Math.round(n / 5)).reduce((s, v) => s + v, 0)
  const standingTravel = standing / total, jumpShare = fastest / travel
  return { standingTravel, jumpShare, says: standingTravel > LIMIT && jumpShare > LIMIT ? 'sticking' : 'undecided' }
}
