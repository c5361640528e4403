/** Names of series by their bytes: a guess from the order of the file first, then a hash table, never a string per line. */
export class SeriesTable {
  private slots = new Int32Array(1024).fill(-1)
  private readonly names: Uint8Array[] = []
  private readonly hashes: number[] = []
  private readonly following: number[] = []
  private before = -1

  constructor(private readonly onNew: (name: Uint8Array, id: number) => void) {}

  idOf(bytes: Uint8Array, from: number, to: number): number {
    const guess = this.before >= 0 ? this.following[this.before] : -1
    let id = guess >= 0 && this.equal(guess, bytes, from, to) ? guess : -1
    if (id < 0) {
      id = this.look(bytes, from, to)
      if (this.before >= 0) this.following[this.before] = id
    }
    this.before = id
    return id
  }

  /** The series that usually comes next, when its name and a delimiter stand at `from`; else -1. */
  expected(bytes: Uint8Array, from: number, delimiter: number): number {
    // in a file by tag it is the same again, in a file by time the one that followed before
    const id = this.before < 0 ? -1 : this.following[this.before]
    if (id < 0) return -1
    const name = this.names[id]
    const n = name.length
    if (bytes[from + n] !== delimiter) return -1
    for (let i = 0; i < n; i++) if (name[i] !== bytes[from + i]) return -1
    return id
  }

  lengthOf(id: number): number { return this.names[id].length }
  took(id: number): void { this.before = id }

  private equal(id: number, bytes: Uint8Array, from: number, to: number): boolean {
    const name = this.names[id]
    if (name.length !== to - from) return false
    for (let i = 0; i < name.length; i++) if (name[i] !== bytes[from + i]) return false
    return true
  }

  private look(bytes: Uint8Array, from: number, to: number): number {
    let hash = 0x811C9DC5
    for (let i = from; i < to; i++) hash = Math.imul(hash ^ bytes[i], 0x01000193)
    const mask = this.slots.length - 1
    let slot = hash & mask
    for (;;) {
      const id = this.slots[slot]
      if (id < 0) break
      if (this.hashes[id] === hash && this.equal(id, bytes, from, to)) return id
      slot = (slot + 1) & mask
    }
    const id = this.names.length
    // a copy: `slice` of a Buffer would be a view of memory that the next region overwrites
    const name = new Uint8Array(bytes.subarray(from, to))
    this.names.push(name)
    this.hashes.push(hash)
    this.following.push(-1)
    this.slots[slot] = id
    if (this.names.length * 2 > this.slots.length) this.grow()
    this.onNew(name, id)
    return id
  }

  private grow(): void {
    const slots = new Int32Array(this.slots.length * 4).fill(-1)
    const mask = slots.length - 1
    for (let id = 0; id < this.names.length; id++) {
      let slot = this.hashes[id] & mask
      while (slots[slot] >= 0) slot = (slot + 1) & mask
      slots[slot] = id
    }
    this.slots = slots
  }
}
