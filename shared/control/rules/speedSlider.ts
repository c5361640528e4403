import type { ProcessModel } from '../types'
import { firstOrderModel } from './firstOrderModel'

/**
 * Closed-loop time constant tauC of a slider position between robust (0) and fast (1), for SIMC and lambda tuning.
 * Geometric, so that equal movements feel equal: 1 is tauC = the effective dead time (the fastest that SIMC recommends,
 * Ms about 1.6 to 1.7), 0 is ten times that. Without much dead time the lag sets the scale (a twentieth of it at least).
 * @param position 0..1
 * @returns s, positive
 * @throws RangeError when the position is outside 0..1 or the model makes no sense
 * Source: Skogestad (2003) for the fast end; the range is our choice.
 */
export function speedSlider(model: ProcessModel, position: number): number {
  if (!(position >= 0 && position <= 1)) throw new RangeError(`speedSlider: the position must be within 0..1, got ${position}`)
  const first = firstOrderModel(model)
  const fastest = first.kind === 'integrating' ? first.deadTime || 1 : Math.max(first.deadTime, first.timeConstant / 20)
  return fastest * 10 ** (1 - position)
}
