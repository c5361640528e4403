/** A growing byte buffer that is used again and again: fresh memory costs more here than the encoding itself. */
export class ByteBuffer {
  bytes = new Uint8Array(1 << 16)
  private view = new DataView(this.bytes.buffer)
  length = 0

  reset(): void { this.length = 0 }

  /** Makes room for `more` bytes beyond `length`. */
  reserve(more: number): void {
    if (this.length + more <= this.bytes.length) return
    const larger = new Uint8Array(Math.max(this.bytes.length * 2, this.length + more))
    larger.set(this.bytes.subarray(0, this.length))
    this.bytes = larger
    this.view = new DataView(larger.buffer)
  }

  byte(value: number): void { this.reserve(1); this.bytes[this.length++] = value }

  float64(value: number): void {
    this.reserve(8)
    this.view.setFloat64(this.length, value, true)
    this.length += 8
  }

  /** Unsigned, whole, up to 2^53: seven bits a byte, low ones first. */
  varint(value: number): void {
    this.reserve(8)
    while (value >= 0x80000000) {
      this.bytes[this.length++] = (value % 128) | 128
      value = Math.floor(value / 128)
    }
    while (value >= 128) {
      this.bytes[this.length++] = (value & 127) | 128
      value >>>= 7
    }
    this.bytes[this.length++] = value
  }

  copy(): Uint8Array { return this.bytes.slice(0, this.length) }
}
