import { MODE_UNKNOWN, type DaySamples } from './types'

/**
 * Lays later samples over earlier ones of the same loop and day. A value of the later wins; a missing value is no
 * sample and never wipes out one that is there.
 * @returns the union, how many values that were there now differ, how many are new, and the first and last time (epoch
 * ms) at which something is different or new; NaN when nothing is
 */
export function mergeSamples(earlier: DaySamples, later: DaySamples): { samples: DaySamples, changed: number, added: number, fromMs: number, toMs: number } {
  const a = earlier.t
  const b = later.t
  const room = a.length + b.length
  const fromA = new Int32Array(room)
  const fromB = new Int32Array(room)
  const t = new Float64Array(room)
  let n = 0
  for (let i = 0, k = 0; i < a.length || k < b.length; n++) {
    const takeA = k >= b.length || (i < a.length && a[i] <= b[k])
    const takeB = i >= a.length || (k < b.length && b[k] <= a[i])
    t[n] = takeA ? a[i] : b[k]
    fromA[n] = takeA ? i++ : -1
    fromB[n] = takeB ? k++ : -1
  }

  let changed = 0
  let added = 0
  let first = n
  let last = -1
  const touch = (i: number) => {
    if (i < first) first = i
    if (i > last) last = i
  }
  const values = (x: Float64Array | null, y: Float64Array | null): Float64Array | null => {
    if (!x && !y) return null
    const out = new Float64Array(n)
    for (let i = 0; i < n; i++) {
      const old = x && fromA[i] >= 0 ? x[fromA[i]] : NaN
      const now = y && fromB[i] >= 0 ? y[fromB[i]] : NaN
      if (now !== now) { out[i] = old }
      else {
        out[i] = now
        if (old === now) continue
        if (old !== old) added++
        else changed++
        touch(i)
      }
    }
    return out
  }
  const modeNames = [...earlier.modeNames]
  const codes = later.modeNames.map((name) => {
    const known = modeNames.indexOf(name)
    if (known >= 0) return known
    return modeNames.length < MODE_UNKNOWN ? modeNames.push(name) - 1 : MODE_UNKNOWN
  })
  const modes = (x: Uint8Array | null, y: Uint8Array | null): Uint8Array | null => {
    if (!x && !y) return null
    const out = new Uint8Array(n)
    for (let i = 0; i < n; i++) {
      const old = x && fromA[i] >= 0 ? x[fromA[i]] : MODE_UNKNOWN
      const code = y && fromB[i] >= 0 ? y[fromB[i]] : MODE_UNKNOWN
      const now = code === MODE_UNKNOWN ? MODE_UNKNOWN : codes[code]
      if (now === MODE_UNKNOWN) { out[i] = old }
      else {
        out[i] = now
        if (old === now) continue
        if (old === MODE_UNKNOWN) added++
        else changed++
        touch(i)
      }
    }
    return out
  }
  const samples: DaySamples = {
    t: t.slice(0, n),
    pv: values(earlier.pv, later.pv), sp: values(earlier.sp, later.sp), op: values(earlier.op, later.op),
    mode: modes(earlier.mode, later.mode), modeNames,
  }
  return { samples, changed, added, fromMs: last < 0 ? NaN : t[first], toMs: last < 0 ? NaN : t[last] }
}
