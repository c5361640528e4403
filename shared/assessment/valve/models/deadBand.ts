/**
 * Dead band (backlash) without stick: each call takes the command of one sample and gives the stem position, which follows
 * at a distance of half the width. O(1) per call. Throws RangeError on a negative or non-finite width or start.
 * Source: definition of the play operator; equals the model of Kano and others with J = 0 once both have moved and while the command does not rest.
 */
export function createDeadBand({ width, initial }: { width: number, initial: number }): (command: number) => number {
  if (!(width >= 0) || !Number.isFinite(width)) throw new RangeError(`width must be a number >= 0, got ${width}`)
  if (!Number.isFinite(initial)) throw new RangeError(`initial must be finite, got ${initial}`)
  let stem = initial
  return (command) => {
    if (command > stem + width / 2) stem = command - width / 2
    else if (command < stem - width / 2) stem = command + width / 2
    return stem
  }
}
