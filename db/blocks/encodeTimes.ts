import { ByteBuffer } from './byteBuffer'

const scratch = new ByteBuffer()

/** The constant step of t[from..to), ms, or null when it is not one. A single sample has step 0. */
export function regularInterval(t: Float64Array, from = 0, to = t.length): number | null {
  if (to - from < 2) return 0
  const step = t[from + 1] - t[from]
  for (let i = from + 2; i < to; i++) if (t[i] - t[i - 1] !== step) return null
  return step
}

/**
 * Irregular time stamps t[from..to) as varints of the zig-zag change of step: a grid with gaps is nearly all zeros,
 * which the database's own compression then takes away. The first step counts from t0.
 * @param t epoch ms, whole, ascending
 */
export function encodeTimes(t: Float64Array, t0: number, from = 0, to = t.length): Uint8Array {
  scratch.reset()
  let before = t0
  let step = 0
  for (let i = from; i < to; i++) {
    const next = t[i] - before
    const change = next - step
    scratch.varint(change >= 0 ? change * 2 : -change * 2 - 1)
    before = t[i]
    step = next
  }
  return scratch.copy()
}
