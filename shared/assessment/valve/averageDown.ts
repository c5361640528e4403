/** Means over blocks of `factor` samples, the last incomplete block left out. O(n). */
export function averageDown(x: Float64Array, factor: number): Float64Array {
  if (!Number.isInteger(factor) || factor < 1) throw new RangeError(`factor must be an integer >= 1, got ${factor}`)
  const out = new Float64Array(Math.floor(x.length / factor))
  for (let i = 0; i < out.length; i++) {
    let sum = 0
    for (let j = 0; j < factor; j++) sum += x[i * factor + j]
    out[i] = sum / factor
  }
  return out
}
