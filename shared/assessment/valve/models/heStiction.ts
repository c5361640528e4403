import { requireStictionSetup, type StictionSetup } from './kanoStiction'

/**
 * A sticking valve with static friction (S + J) / 2 and dynamic friction (S - J) / 2: each call takes the command of one
 * sample and gives the stem position. The stem sticks again after every move, so a ramp comes out as stairs. O(1) per call.
 * Throws RangeError on a negative or non-finite set-up.
 * Source: He, Wang, Pottmann, Qin 2007, "A curve fitting method for detecting valve stiction in oscillating control loops".
 * Fixture: fixtures/reference/stiction.json.
 */
export function createHeStiction(setup: StictionSetup): (command: number) => number {
  requireStictionSetup(setup)
  const staticFriction = (setup.stickBand + setup.slipJump) / 2
  const dynamicFriction = (setup.stickBand - setup.slipJump) / 2
  let stem = setup.initial
  let previous = setup.initial
  let residual = 0
  return (command) => {
    if (Number.isNaN(command)) return stem
    const force = residual + command - previous
    if (Math.abs(force) > staticFriction) {
      const side = Math.sign(force - staticFriction) || 1
      stem += force - side * dynamicFriction
      residual = side * dynamicFriction
    }
    else residual = force
    previous = command
    return stem
  }
}
