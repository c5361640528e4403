/**
 * Number of samples up to and including the last at which the deviation is more than `fraction` of its peak: what lies
 * beyond is the tail that would drown the idle index. O(n).
 * @param deviation process variable less where it settles, NaN is passed over
 * @param fraction in (0, 1), 5 % unless given
 * @returns 0 when there is no deviation
 * Source: ours (a verified weakness of the raw index); fixtures/reference/idle.json.
 */
export function untilSettled(deviation: Float64Array, fraction = 0.05): number {
  if (!(fraction > 0 && fraction < 1)) throw new RangeError(`fraction must lie in (0, 1), got ${fraction}`)
  let peak = 0
  for (const value of deviation) if (Math.abs(value) > peak) peak = Math.abs(value)
  for (let i = deviation.length - 1; i >= 0; i--) if (Math.abs(deviation[i]) > fraction * peak) return i + 1
  return 0
}
