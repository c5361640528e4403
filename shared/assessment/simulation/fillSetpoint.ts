import { addLoad } from './addLoad'
import type { SetpointProgramme } from './scenario'

/**
 * Writes a set-point programme into `out`, one value per step, beginning at time 0. O(length + points).
 * @param out overwritten, length n
 * @param stepS s, > 0
 * @throws RangeError when points do not ascend in time
 * Source: definition.
 */
export function fillSetpoint(programme: SetpointProgramme, out: Float64Array, stepS: number): void {
  const n = out.length
  if (programme.kind === 'constant') { out.fill(programme.value); return }
  if (programme.kind === 'wandering') {
    out.fill(programme.base)
    addLoad({ kind: 'coloured', standardDeviation: programme.standardDeviation, timeConstantS: programme.timeConstantS, seed: programme.seed }, out, stepS)
    return
  }
  if (programme.kind === 'signal') {
    const { values, stepS: signalStep } = programme
    const last = values.length - 1
    for (let k = 0; k < n; k++) {
      const x = k * stepS / signalStep
      const i = Math.min(Math.floor(x), last)
      out[k] = i === last ? values[last] : values[i] + (x - i) * (values[i + 1] - values[i])
    }
    return
  }
  let value = programme.start
  let time = 0
  let k = 0
  for (const point of programme.points) {
    if (point.at < time) throw new RangeError(`points of a set-point programme must ascend, got ${point.at} s after ${time} s`)
    const slope = point.ramp && point.at > time ? (point.value - value) / (point.at - time) : 0
    for (; k < n && k * stepS < point.at; k++) out[k] = value + slope * (k * stepS - time)
    value = point.value
    time = point.at
  }
  out.fill(value, k)
}
