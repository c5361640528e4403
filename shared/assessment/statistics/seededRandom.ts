/** A repeatable source of random numbers. */
export interface SeededRandom {
  /** uniform in [0, 1), 53 bits */
  uniform(): number
  /** standard normal */
  normal(): number
  /** uniform integer in 0..n-1 */
  integer(n: number): number
}

const N = 624
const M = 397

/**
 * Seeded generator: Mersenne Twister MT19937, 53-bit uniforms, normals by the polar method.
 *
 * The same numbers as numpy's `RandomState(seed)`: `random_sample()` to the last bit, `standard_normal()` to rounding
 * of the logarithm, as long as each is drawn in the same order. So a simulated record can be made again outside.
 * `integer(n)` is floor(n * uniform()); its bias is below n / 2^53.
 *
 * @param seed integer 0..2^32-1
 * @returns a generator with its own state
 * @throws RangeError when the seed is no integer in that range; `integer` throws for n outside 1..2^32
 * Source: M. Matsumoto, T. Nishimura (1998) Mersenne Twister, ACM Trans. Modeling and Computer Simulation 8:3-30
 * (initialisation of 2002); G. Marsaglia, T. A. Bray (1964) A convenient method for generating normal variables, SIAM
 * Review 6:260-264. Reference: the 10,000th value required by the C++ standard ([rand.predef]) and
 * fixtures/reference/numpy.json.
 */
export function seededRandom(seed: number): SeededRandom {
  if (!Number.isInteger(seed) || seed < 0 || seed > 0xffffffff) throw new RangeError(`seed must be an integer from 0 to 2^32 - 1, got ${seed}`)
  const state = new Uint32Array(N)
  state[0] = seed
  for (let i = 1; i < N; i++) state[i] = Math.imul(1812433253, state[i - 1] ^ (state[i - 1] >>> 30)) + i
  let at = N
  let spare = NaN

  const refill = () => {
    for (let k = 0; k < N; k++) {
      const y = (state[k] & 0x80000000) | (state[(k + 1) % N] & 0x7fffffff)
      state[k] = state[(k + M) % N] ^ (y >>> 1) ^ (y & 1 ? 0x9908b0df : 0)
    }
    at = 0
  }
  const next = (): number => {
    if (at === N) refill()
    let y = state[at++]
    y ^= y >>> 11
    y ^= (y << 7) & 0x9d2c5680
    y ^= (y << 15) & 0xefc60000
    return (y ^ (y >>> 18)) >>> 0
  }
  const uniform = (): number => {
    const high = next() >>> 5
    return (high * 67108864 + (next() >>> 6)) / 9007199254740992
  }
  const normal = (): number => {
    if (spare === spare) {
      const kept = spare
      spare = NaN
      return kept
    }
    let a: number, b: number, square: number
    do {
      a = 2 * uniform() - 1
      b = 2 * uniform() - 1
      square = a * a + b * b
    } while (square >= 1 || square === 0)
    const scale = Math.sqrt(-2 * Math.log(square) / square)
    spare = scale * a
    return scale * b
  }
  const integer = (n: number): number => {
    if (!Number.isInteger(n) || n < 1 || n > 0x100000000) throw new RangeError(`integer(n) needs an integer n from 1 to 2^32, got ${n}`)
    return Math.floor(n * uniform())
  }
  return { uniform, normal, integer }
}
