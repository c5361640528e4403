/** Seeded standard normal numbers: mulberry32 and the polar method. */
export function normalNumbers(seed: number): () => number {
  let state = seed >>> 0
  const uniform = () => {
    state = (state + 0x6D2B79F5) >>> 0
    let t = state
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
  let spare: number | null = null
  return () => {
    if (spare !== null) {
      const value = spare
      spare = null
      return value
    }
    for (;;) {
      const a = 2 * uniform() - 1
      const b = 2 * uniform() - 1
      const s = a * a + b * b
      if (s > 0 && s < 1) {
        const factor = Math.sqrt(-2 * Math.log(s) / s)
        spare = b * factor
        return a * factor
      }
    }
  }
}
