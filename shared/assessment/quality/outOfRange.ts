/**
 * Marks the samples that lie beyond the instrument's range by more than a share of its span.
 *
 * @param x any length, NaN: missing (not marked)
 * @param options low < high: instrument range, unit of x; marginFraction of the span, >= 0, default 0.05
 * @returns 1 where out of range, length of x
 * @throws RangeError on options outside their range
 * Source: common practice, no source (5 % is our default). Reference: constructed cases. Cost O(n).
 */
export function outOfRange(x: Float64Array, options: { low: number, high: number, marginFraction?: number }): Uint8Array {
  const { low, high, marginFraction = 0.05 } = options
  if (!(high > low) || !Number.isFinite(high - low)) throw new RangeError(`range must satisfy low < high, got ${low} and ${high}`)
  if (!(marginFraction >= 0)) throw new RangeError(`marginFraction must be 0 or more, got ${marginFraction}`)
  const margin = marginFraction * (high - low)
  const marked = new Uint8Array(x.length)
  for (let i = 0; i < x.length; i++) if (x[i] < low - margin || x[i] > high + margin) marked[i] = 1
  return marked
}
