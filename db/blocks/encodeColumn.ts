import { ByteBuffer } from './byteBuffer'

export const COLUMN_MISSING = 0
export const COLUMN_CONSTANT = 1
export const COLUMN_SCALED = 2
export const COLUMN_RAW = 3

const MAX_DECIMALS = 9
/** Differences of two such integers, doubled by zig-zag, still are exact in a double. */
const LARGEST_INTEGER = 2 ** 50
const POWERS = Array.from({ length: MAX_DECIMALS + 1 }, (_, d) => 10 ** d)
const scratch = new ByteBuffer()
/** The scaled values of the column at hand; NaN where a value is missing or no short decimal. */
let whole = new Float64Array(1 << 14)

/**
 * Encodes values[from..to) as one segment, without loss: decoding gives the same numbers (only -0 becomes 0).
 *
 * Values are scaled by their decimals to integers, and the differences between neighbours written as zig-zag varints;
 * most process data need one byte so. Token 0 is NaN, token 1 a value that is not a short decimal, followed by its
 * eight bytes. Each value is checked to come back equal before it is scaled. When more than one in eight is no short
 * decimal the segment is raw Float64. A column may be several segments, one after the other.
 *
 * @param values any unit; NaN: missing
 * @returns a new array of its own
 */
export function encodeColumn(values: Float64Array, from = 0, to = values.length): Uint8Array {
  if (from < 0 || to > values.length || from > to) throw new RangeError(`encodeColumn: [${from}, ${to}) is not within 0..${values.length}`)
  const n = to - from
  const out = scratch
  out.reset()
  if (n === 0) return out.copy()

  const first = values[from]
  let same = from + 1
  if (first === first) { while (same < to && values[same] === first) same++ }
  else { while (same < to && values[same] !== values[same]) same++ }
  if (same === to) {
    if (first !== first) {
      out.byte(COLUMN_MISSING)
      out.varint(n)
    }
    else {
      out.byte(COLUMN_CONSTANT)
      out.varint(n)
      out.float64(first)
    }
    return out.copy()
  }

  // Once the decimals of a value are known they never shrink: a number that is short at d decimals is short at d + 1.
  let decimals = 0
  let power = 1
  let odd = 0
  if (whole.length < n) whole = new Float64Array(n)
  for (let i = from, k = 0; i < to; i++, k++) {
    const value = values[i]
    const scaled = Math.round(value * power)
    if (scaled / power === value && scaled < LARGEST_INTEGER && scaled > -LARGEST_INTEGER) {
      whole[k] = scaled
      continue
    }
    whole[k] = NaN
    if (value !== value) continue
    let d = decimals
    let fits = false
    while (!fits && ++d <= MAX_DECIMALS) {
      const longer = Math.round(value * POWERS[d])
      fits = longer / POWERS[d] === value && Math.abs(longer) < LARGEST_INTEGER
    }
    if (fits) {
      // what came before is scaled anew
      decimals = d
      power = POWERS[d]
      i = from - 1
      k = -1
      odd = 0
    }
    else { odd++ }
  }
  if (odd * 8 > n) {
    out.byte(COLUMN_RAW)
    out.varint(n)
    out.reserve(n * 8)
    for (let i = from; i < to; i++) out.float64(values[i])
    return out.copy()
  }

  out.byte(COLUMN_SCALED)
  out.varint(n)
  out.byte(decimals)
  out.reserve(n * 9 + 16)
  let bytes = out.bytes
  let at = out.length
  let before = 0
  for (let i = from, k = 0; i < to; i++, k++) {
    const scaled = whole[k]
    if (scaled !== scaled) {
      const value = values[i]
      if (value !== value) {
        bytes[at++] = 0
        continue
      }
      bytes[at++] = 1
      out.length = at
      out.float64(value)
      bytes = out.bytes
      at = out.length
      continue
    }
    const delta = scaled - before
    before = scaled
    let token = (delta >= 0 ? delta * 2 : -delta * 2 - 1) + 2
    while (token >= 0x80000000) {
      bytes[at++] = (token % 128) | 128
      token = Math.floor(token / 128)
    }
    while (token >= 128) {
      bytes[at++] = (token & 127) | 128
      token >>>= 7
    }
    bytes[at++] = token
  }
  out.length = at
  return out.copy()
}
