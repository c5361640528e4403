import { MODE_UNKNOWN } from '../../../../db/blocks/types'
import { normaliseMode } from './cells'

/** Mode words of one file as codes. A cell equal to the one before it in its column costs one comparison. */
export class ModeNames {
  readonly names: string[] = []

  /** @returns a code, or MODE_UNKNOWN for a missing mode */
  codeOf(text: string): number {
    const word = normaliseMode(text)
    if (word === '') return MODE_UNKNOWN
    const known = this.names.indexOf(word)
    if (known >= 0) return known
    // a column with hundreds of different words is no mode; beyond 250 they count as unknown
    return this.names.length < 250 ? this.names.push(word) - 1 : MODE_UNKNOWN
  }
}

/** Remembers the last cell of a column byte by byte. */
export class LastCell {
  private readonly bytes = new Uint8Array(48)
  private length = -1
  code = 0

  same(bytes: Uint8Array, from: number, to: number): boolean {
    const n = to - from
    if (n !== this.length) return false
    for (let i = 0; i < n; i++) if (this.bytes[i] !== bytes[from + i]) return false
    return true
  }

  /** Length of the remembered cell when it stands at `from` (what follows is not looked at), else -1. */
  matches(bytes: Uint8Array, from: number): number {
    const n = this.length
    for (let i = 0; i < n; i++) if (this.bytes[i] !== bytes[from + i]) return -1
    return n
  }

  keep(bytes: Uint8Array, from: number, to: number, code: number): void {
    const n = to - from
    this.length = n <= this.bytes.length ? n : -1
    for (let i = 0; i < this.length; i++) this.bytes[i] = bytes[from + i]
    this.code = code
  }
}
