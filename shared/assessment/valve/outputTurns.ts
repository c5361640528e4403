/** A turn counts when the output has come back by this share of its usual range (5 to 95 % quantile). */
const SHARE = 0.3

/**
 * Where the controller output turns, small wiggles left out. O(n log n).
 * @param op finite, length n
 * @returns samples of the extremes, ascending, alternately high and low; empty when it stands still
 * Source: definition (turning points with hysteresis).
 */
export function outputTurns(op: Float64Array): Int32Array {
  if (op.length < 3) return new Int32Array(0)
  const sorted = op.slice().sort()
  const band = SHARE * (sorted[Math.floor(0.95 * (op.length - 1))] - sorted[Math.floor(0.05 * (op.length - 1))])
  if (!(band > 0)) return new Int32Array(0)
  const turns: number[] = []
  let high = 0, low = 0, direction = 0
  for (let i = 1; i < op.length; i++) {
    if (op[i] > op[high]) high = i
    if (op[i] < op[low]) low = i
    if (direction >= 0 && op[high] - op[i] > band) {
      if (direction > 0) turns.push(high)
      direction = -1
      low = i
      for (let j = high; j <= i; j++) if (op[j] < op[low]) low = j
    }
    else if (direction <= 0 && op[i] - op[low] > band) {
      if (direction < 0) turns.push(low)
      direction = 1
      high = i
      for (let j = low; j <= i; j++) if (op[j] > op[high]) high = j
    }
  }
  return Int32Array.from(turns)
}
