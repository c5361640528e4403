import { requireStictionSetup, type StictionSetup } from './kanoStiction'

/**
 * A sticking valve: each call takes the command of one sample and gives the stem position, limited to `low`..`high`
 * (0..100 unless given). Every change of sign of the command's slope restarts the dead band, so measurement noise on the
 * command keeps the stem stuck longer than in Kano's model; on ramps, triangles and sines both are equal. A rest while
 * moving needs J to go on in the same direction and S to turn back (our reading of the flowchart). O(1) per call.
 * Throws RangeError on a negative or non-finite set-up and on J > S, for which the model is not defined.
 * Source: Choudhury, Thornhill, Shah 2005, "Modelling valve stiction". Fixture: fixtures/reference/stiction.json.
 */
export function createChoudhuryStiction(setup: StictionSetup & { low?: number, high?: number }): (command: number) => number {
  requireStictionSetup(setup)
  const { stickBand: S, slipJump: J, initial, low = 0, high = 100 } = setup
  if (J > S) throw new RangeError(`slipJump must not exceed stickBand in this model, got ${J} > ${S}`)
  let stem = initial
  let previous = initial
  let previousSlope = 0
  let stuckAt = initial
  let direction = 0
  let state: 'reversed' | 'rested' | 'moving' = 'reversed'
  return (command) => {
    if (Number.isNaN(command)) return stem
    const slope = Math.sign(command - previous)
    if (command <= low || command >= high) {
      stem = Math.min(Math.max(command, low), high)
      state = 'moving'
      direction = slope || direction
    }
    else if (slope === 0) {
      if (state === 'moving') { state = 'rested'; stuckAt = previous }
    }
    else {
      if (previousSlope !== 0 && slope !== previousSlope) { state = 'reversed'; stuckAt = previous }
      else if (state === 'rested' && slope !== direction) state = 'reversed'
      if (state === 'moving' || Math.abs(command - stuckAt) > (state === 'rested' ? J : S)) {
        state = 'moving'
        direction = slope
        stem = command - slope * (S - J) / 2
      }
    }
    previousSlope = slope
    previous = command
    return stem
  }
}
