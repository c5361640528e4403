/**
 * What the set point does in a record: stands, is stepped now and then, or moves all the time (a cascade secondary).
 *
 * A change counts above 1e-6 of the PV span, so that decimals of a historian are not moves. Moving: more than one
 * sample in five changes. Cost O(n). Source: common practice, no source.
 *
 * @param sp set point, PV unit, NaN where missing
 * @param pvSpan width of the PV range, > 0
 */
export function setpointActivity(sp: Float64Array | null, pvSpan: number): { kind: 'absent' | 'still' | 'stepped' | 'moving', changedShare: number, changes: number } {
  if (!(pvSpan > 0)) throw new RangeError(`setpointActivity: pvSpan must be above 0, got ${pvSpan}`)
  if (!sp) return { kind: 'absent', changedShare: 0, changes: 0 }
  const least = 1e-6 * pvSpan
  let pairs = 0
  let changes = 0
  let last = NaN
  for (let i = 0; i < sp.length; i++) {
    const x = sp[i]
    if (x !== x) continue
    if (last === last) {
      pairs++
      if (Math.abs(x - last) > least) changes++
    }
    last = x
  }
  if (last !== last) return { kind: 'absent', changedShare: 0, changes: 0 }
  const changedShare = pairs > 0 ? changes / pairs : 0
  return { kind: changes === 0 ? 'still' : changedShare > 0.2 ? 'moving' : 'stepped', changedShare, changes }
}
