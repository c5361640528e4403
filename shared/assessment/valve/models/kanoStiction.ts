export interface StictionSetup {
  /** S: dead band plus stick band, unit of the command, >= 0 */
  stickBand: number
  /** J: slip jump, unit of the command, >= 0 */
  slipJump: number
  /** command and stem position before the first call */
  initial: number
}

/** Refuses a set-up that no valve can have; shared by the three models. */
export function requireStictionSetup({ stickBand, slipJump, initial }: StictionSetup): void {
  if (!(stickBand >= 0) || !Number.isFinite(stickBand)) throw new RangeError(`stickBand must be a number >= 0, got ${stickBand}`)
  if (!(slipJump >= 0) || !Number.isFinite(slipJump)) throw new RangeError(`slipJump must be a number >= 0, got ${slipJump}`)
  if (!Number.isFinite(initial)) throw new RangeError(`initial must be finite, got ${initial}`)
}

/**
 * A sticking valve: each call takes the command of one sample and gives the stem position. The valve starts stuck, having
 * last travelled downwards. J > S (overshooting jumps) is allowed. O(1) per call.
 * Throws RangeError on a negative or non-finite set-up; a NaN command keeps the stem where it is.
 * Source: Kano, Maruta, Kugemoto, Shimizu 2004, "Practical model and detection algorithm for valve stiction".
 * Fixture: fixtures/reference/stiction.json.
 */
export function createKanoStiction(setup: StictionSetup): (command: number) => number {
  requireStictionSetup(setup)
  const { stickBand: S, slipJump: J, initial } = setup
  let stem = initial
  let previous = initial
  let previousStep = 0
  let stuckAt = initial
  let stuck = true
  let direction = -1
  return (command) => {
    if (Number.isNaN(command)) return stem
    const step = command - previous
    if (step * previousStep <= 0 && !stuck) { stuckAt = previous; stuck = true }
    if (!stuck) stem = command - direction * (S - J) / 2
    else if (-direction * (command - stuckAt) > S) { direction = -direction; stuck = false; stem = command - direction * (S - J) / 2 }
    else if (direction * (command - stuckAt) > J) { stuck = false; stem = command - direction * (S - J) / 2 }
    previousStep = step
    previous = command
    return stem
  }
}
