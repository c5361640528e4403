/** Time stamps (epoch ms) of a block: a grid when `intervalMs` is set, else the inverse of `encodeTimes`. */
export function decodeTimes(block: { n: number, t0: number, intervalMs: number | null, timestamps: Uint8Array | null }, out: Float64Array = new Float64Array(block.n), at = 0): Float64Array {
  const { n, t0, intervalMs, timestamps } = block
  if (intervalMs !== null) {
    for (let i = 0; i < n; i++) out[at + i] = t0 + i * intervalMs
    return out
  }
  if (!timestamps) throw new Error('decodeTimes: the block has neither an interval nor time stamps')
  let p = 0
  let before = t0
  let step = 0
  for (let i = 0; i < n; i++) {
    let z = 0
    let factor = 1
    for (;;) {
      const b = timestamps[p++]
      if (b === undefined) throw new Error(`decodeTimes: the time stamps end after ${i} of ${n}`)
      z += (b & 127) * factor
      if (b < 128) break
      factor *= 128
    }
    step += z % 2 === 0 ? z / 2 : -(z + 1) / 2
    before += step
    out[at + i] = before
  }
  return out
}
