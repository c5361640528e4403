/** The inverse of `encodeModes`. Throws when the runs do not make up n samples. */
export function decodeModes(runs: Uint8Array, n: number, out: Uint8Array = new Uint8Array(n), at = 0): Uint8Array {
  const end = at + n
  let i = at
  let p = 0
  while (p < runs.length) {
    const code = runs[p++]
    let count = 0
    let factor = 1
    for (;;) {
      const b = runs[p++]
      count += (b & 127) * factor
      if (b < 128) break
      factor *= 128
    }
    if (!(i + count <= end)) throw new Error(`decodeModes: the runs hold more than ${n} samples`)
    out.fill(code, i, i + count)
    i += count
  }
  if (i !== end) throw new Error(`decodeModes: the runs hold ${i - at} samples, their block ${n}`)
  return out
}
