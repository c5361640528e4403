import { ByteBuffer } from './byteBuffer'

const scratch = new ByteBuffer()

/** Mode codes[from..to) as runs: code, then length as varint. Runs of two parts may follow each other. */
export function encodeModes(codes: Uint8Array, from = 0, to = codes.length): Uint8Array {
  scratch.reset()
  for (let i = from; i < to;) {
    let k = i + 1
    while (k < to && codes[k] === codes[i]) k++
    scratch.byte(codes[i])
    scratch.varint(k - i)
    i = k
  }
  return scratch.copy()
}
