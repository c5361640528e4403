const R = 3.442619855899
const kn = new Uint32Array(128)
const wn = new Float64Array(128)
const fn = new Float64Array(128)
{
  const m = 2147483648
  const volume = 9.91256303526217e-3
  let d = R
  let previous = R
  const q = volume / Math.exp(-0.5 * d * d)
  kn[0] = (d / q) * m
  wn[0] = q / m
  wn[127] = d / m
  fn[0] = 1
  fn[127] = Math.exp(-0.5 * d * d)
  for (let i = 126; i >= 1; i--) {
    d = Math.sqrt(-2 * Math.log(volume / d + Math.exp(-0.5 * d * d)))
    kn[i + 1] = (d / previous) * m
    previous = d
    fn[i] = Math.exp(-0.5 * d * d)
    wn[i] = d / m
  }
  kn[1] = 0
}

/**
 * Standard normal noise for simulation, several times as fast as `seededRandom().normal()`, which it does not replace: a plant
 * draws some hundred million numbers, and these need not be those of another program.
 * @param seed integer 0..2^32-1
 * @returns `normal()` standard normal; `uniform()` in [0, 1), 32 bits
 * Source: G. Marsaglia, W. W. Tsang (2000) The ziggurat method for generating random variables, J. Statistical Software
 * 5(8), 128 layers, with the layer and the value taken from different draws (J. A. Doornik 2005); generator xoshiro128++ of
 * D. Blackman, S. Vigna (2021), seeded by splitmix32.
 */
export function noiseSource(seed: number): { normal(): number, uniform(): number } {
  let z = seed | 0
  const split = () => {
    z = (z + 0x9e3779b9) | 0
    let h = z
    h = Math.imul(h ^ (h >>> 16), 0x21f0aaad)
    h = Math.imul(h ^ (h >>> 15), 0x735a2d97)
    return h ^ (h >>> 15)
  }
  let a = split(), b = split(), c = split(), d = split()
  const next = (): number => {
    const sum = (a + d) | 0
    const result = (((sum << 7) | (sum >>> 25)) + a) | 0
    const shifted = b << 9
    c ^= a
    d ^= b
    b ^= c
    a ^= d
    c ^= shifted
    d = (d << 11) | (d >>> 21)
    return result
  }
  const uniform = (): number => (next() >>> 0) / 4294967296
  const normal = (): number => {
    for (;;) {
      const value = next()
      const i = next() & 127
      const size = value < 0 ? -value : value
      if (size < kn[i]) return value * wn[i]
      if (i === 0) {
        let x: number, y: number
        do {
          x = -Math.log(1 - uniform()) / R
          y = -Math.log(1 - uniform())
        } while (y + y < x * x)
        return value > 0 ? R + x : -R - x
      }
      const x = value * wn[i]
      if (fn[i] + uniform() * (fn[i - 1] - fn[i]) < Math.exp(-0.5 * x * x)) return x
    }
  }
  return { normal, uniform }
}
