/**
 * Memory by name, one set per thread, kept between uploads: the first touch of fresh memory is what costs, the
 * second is free. Two readers never run at once in one thread.
 */
const floats = new Map<string, Float64Array>()
const bytes = new Map<string, Uint8Array>()
const ints = new Map<string, Int32Array>()

export function pooledFloats(name: string, length: number): Float64Array {
  let found = floats.get(name)
  if (!found || found.length < length) floats.set(name, found = new Float64Array(length))
  return found
}

export function pooledBytes(name: string, length: number): Uint8Array {
  let found = bytes.get(name)
  if (!found || found.length < length) bytes.set(name, found = new Uint8Array(length))
  return found
}

export function pooledInts(name: string, length: number): Int32Array {
  let found = ints.get(name)
  if (!found || found.length < length) ints.set(name, found = new Int32Array(length))
  return found
}
