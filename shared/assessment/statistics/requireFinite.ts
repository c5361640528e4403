/**
 * Throws unless every value of `x` is a finite number.
 *
 * The numerical functions call it once at their door: a NaN that slips into a sum turns every later figure into NaN,
 * and by then nobody can tell which sample it was.
 *
 * @param x any length
 * @param name what to call the array in the message
 * @throws RangeError naming the first offending index and value
 */
export function requireFinite(x: Float64Array, name: string): void {
  for (let i = 0; i < x.length; i++) {
    // x - x is 0 for finite numbers only; cheaper than Number.isFinite in the inner loop
    if (x[i] - x[i] !== 0) throw new RangeError(`${name}[${i}] must be a finite number, got ${x[i]}`)
  }
}
