/**
 * A new seed from a seed and a stream number, so that parts of one simulation draw from unrelated sources.
 * @returns integer 0..2^32-1
 * Source: finaliser of MurmurHash3 (A. Appleby, public domain), a mixing function only.
 */
export function mixSeed(seed: number, stream: number): number {
  let h = (seed ^ Math.imul(stream + 0x9e3779b9, 0x85ebca6b)) >>> 0
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b)
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35)
  return (h ^ (h >>> 16)) >>> 0
}
