import { insufficient, type Insufficient } from '../types'
import { outputTurns } from './outputTurns'

export interface DeadBandSlipJump {
  /** S: travel of the output from its turn until the process variable answers, median, unit of op */
  stickBand: number
  /** quartiles of that travel */
  stickBandLow: number
  stickBandHigh: number
  /** share of the process variable's swing made at once when it answers: near 0 dead band alone, near 1 slip jump alone */
  jumpShare: number
  /** J, unit of op; null without a process gain */
  slipJump: number | null
  turns: number
}

const FEWEST = 8
/** The process variable has answered when it has gone this share of its usual range. */
const ANSWER = 0.25
/** "At once": this share of the time from turn to turn. */
const AT_ONCE = 0.15

/**
 * Tells dead band from slip jump: after each turn of the output, how far it travels until the process variable answers, and
 * how much of its swing that answer makes at once.
 *
 * Domain: signs of sticking; process variable that follows the valve within a fraction of the period (flow): a lag counts as
 * stick band, so S is an upper bound. At least 8 turns of the output.
 * @param op controller output, finite, length n
 * @param pv process variable, finite, length n
 * @param processGain unit of pv per unit of op, null when unknown
 * Source: ours, after the phases of a sticking valve in Choudhury, Thornhill, Shah 2005. O(n log n).
 */
export function deadBandSlipJump(op: Float64Array, pv: Float64Array, processGain: number | null = null): DeadBandSlipJump | Insufficient {
  if (op.length !== pv.length) throw new RangeError(`op and pv must have one length, got ${op.length} and ${pv.length}`)
  if (processGain !== null && !(Math.abs(processGain) > 0)) throw new RangeError(`processGain must not be 0, got ${processGain}`)
  const turns = outputTurns(op)
  if (turns.length < FEWEST) return insufficient(`${turns.length} turns of the output, ${FEWEST} are needed`)
  const sorted = pv.slice().sort()
  const range = sorted[Math.floor(0.95 * (pv.length - 1))] - sorted[Math.floor(0.05 * (pv.length - 1))]
  if (!(range > 0)) return insufficient('the process variable stands still')
  const travels: number[] = [], jumps: number[] = [], stems: number[] = []
  for (let i = 0; i + 1 < turns.length; i++) {
    const from = turns[i], to = turns[i + 1]
    let at = from
    while (at < to && Math.abs(pv[at] - pv[from]) < ANSWER * range) at++
    if (at === to) continue
    travels.push(Math.abs(op[at] - op[from]))
    const after = Math.min(pv.length - 1, at + Math.max(1, Math.round(AT_ONCE * (to - from))))
    const before = Math.max(from, at - 1)
    const jump = Math.abs(pv[after] - pv[before])
    jumps.push(Math.min(1, jump / range))
    // Once it has slipped the stem follows: what the output moved meanwhile is no jump.
    if (processGain !== null) stems.push(Math.max(0, jump / Math.abs(processGain) - Math.abs(op[after] - op[before])))
  }
  if (travels.length < FEWEST / 2) return insufficient('the process variable does not answer the turns of the output')
  const quantile = (values: number[], p: number) => [...values].sort((a, b) => a - b)[Math.round(p * (values.length - 1))]
  return {
    stickBand: quantile(travels, 0.5), stickBandLow: quantile(travels, 0.25), stickBandHigh: quantile(travels, 0.75),
    jumpShare: quantile(jumps, 0.5), slipJump: processGain === null ? null : quantile(stems, 0.5), turns: travels.length,
  }
}
