import { COLUMN_CONSTANT, COLUMN_MISSING, COLUMN_RAW, COLUMN_SCALED } from './encodeColumn'

/**
 * Decodes all segments of a column into out[at..at+n).
 * @param column bytes of `encodeColumn`, several segments in a row allowed
 * @param n samples expected; a column that holds another number throws, because then the block is damaged
 */
export function decodeColumn(column: Uint8Array, n: number, out: Float64Array = new Float64Array(n), at = 0): Float64Array {
  const view = new DataView(column.buffer, column.byteOffset, column.byteLength)
  const end = at + n
  let p = 0
  let i = at
  while (p < column.length) {
    const kind = column[p++]
    let count = 0
    let factor = 1
    for (;;) {
      const b = column[p++]
      count += (b & 127) * factor
      if (b < 128) break
      factor *= 128
    }
    const until = i + count
    if (!(until <= end)) throw new Error(`decodeColumn: the column holds more than the ${n} samples of its block`)
    if (kind === COLUMN_MISSING) { out.fill(NaN, i, until) }
    else if (kind === COLUMN_CONSTANT) {
      out.fill(view.getFloat64(p, true), i, until)
      p += 8
    }
    else if (kind === COLUMN_RAW) {
      for (let k = i; k < until; k++, p += 8) out[k] = view.getFloat64(p, true)
    }
    else if (kind === COLUMN_SCALED) {
      const power = 10 ** column[p++]
      let scaled = 0
      for (let k = i; k < until; k++) {
        let token = column[p++]
        if (token >= 128) {
          let b = column[p++]
          token = (token & 127) | ((b & 127) << 7)
          if (b >= 128) {
            b = column[p++]
            token |= (b & 127) << 14
            let f = 2097152
            while (b >= 128) {
              b = column[p++]
              token += (b & 127) * f
              f *= 128
            }
          }
        }
        if (token > 1) {
          const z = token - 2
          // whole numbers of 31 bits have a quicker way
          if (z < 0x40000000) scaled += (z >>> 1) ^ -(z & 1)
          else scaled += z % 2 === 0 ? z / 2 : -(z + 1) / 2
          out[k] = scaled / power
        }
        else if (token === 0) { out[k] = NaN }
        else {
          out[k] = view.getFloat64(p, true)
          p += 8
        }
      }
    }
    else { throw new Error(`decodeColumn: segment kind ${kind} is not known`) }
    i = until
  }
  if (i !== end || p !== column.length) throw new Error(`decodeColumn: the column holds ${i - at} samples, its block ${n}`)
  return out
}
