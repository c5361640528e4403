/**
 * A sticking valve, Kano's two-parameter model: the stem stays until the signal has gone through the stick band, slips by
 * the jump, then follows at a distance of (S - J)/2; on a stop or a reversal it sticks again.
 * @param stickBand S, dead band plus stick band, OP unit, not negative
 * @param slipJump J, 0..S, OP unit
 * @param start signal and stem at the beginning
 * @returns a function that takes the signal sample by sample and answers the stem position
 * @throws RangeError when J is not within 0..S
 * Source: M. Kano, H. Maruta, H. Kugemoto, K. Shimizu (2004), Practical model and detection algorithm for valve stiction, IFAC DYCOPS 7.
 */
export function stickingValve(stickBand: number, slipJump: number, start: number): (signal: number) => number {
  if (!(slipJump >= 0 && slipJump <= stickBand)) throw new RangeError(`stickingValve: the slip jump must be within 0..stick band, got ${slipJump}, ${stickBand}`)
  let signalBefore = start
  let stuckAt = start
  let stem = start
  let changeBefore = 0
  let direction = 0
  let stuck = true
  const lag = (stickBand - slipJump) / 2
  return (signal) => {
    const change = signal - signalBefore
    if (change * changeBefore <= 0 && !stuck) {
      stuckAt = signalBefore
      stuck = true
    }
    if (stuck) {
      const moved = signal - stuckAt
      if (direction === 0 ? Math.abs(moved) > stickBand / 2 : direction * moved > slipJump || -direction * moved > stickBand) {
        direction = Math.sign(moved)
        stuck = false
      }
    }
    if (!stuck) stem = signal - direction * lag
    changeBefore = change
    signalBefore = signal
    return stem
  }
}
