/**
 * Positions, in samples, at which a signal changes between positive and not positive, by linear interpolation. O(n).
 * @param atMost stop after this many
 * @returns ascending positions in (0, length - 1]; empty when there is none
 */
export function zeroCrossings(signal: Float64Array, atMost = Number.POSITIVE_INFINITY): Float64Array {
  const found: number[] = []
  for (let i = 0; i + 1 < signal.length && found.length < atMost; i++) {
    const here = signal[i], next = signal[i + 1]
    if ((here > 0) !== (next > 0)) found.push(i + here / (here - next))
  }
  return Float64Array.from(found)
}
