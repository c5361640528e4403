let pool = new Float64Array(1 << 12)

/**
 * Memory for what a function needs only until it returns: the first touch of fresh memory costs more than most sums over it.
 * Every caller gets the same; it holds whatever was there, and nobody may keep it or call another that uses it meanwhile.
 *
 * @param length samples wanted
 * @returns view of that length, not cleared
 */
export function workingMemory(length: number): Float64Array {
  if (pool.length < length) pool = new Float64Array(length)
  return pool.subarray(0, length)
}
