import type { IdealPid, ProcessModel } from '../types'
import { simulateClosedLoop } from './simulateClosedLoop'

/**
 * How far OP travels per hour on measurement noise alone, the loop at rest.
 * @param noise standard deviation in PV unit, interval of the samples in s, seeded standard normal generator
 * @returns OP unit per hour
 * @throws RangeError as `simulateClosedLoop`
 * Source: simulation over 400 samples. The travel of P action alone has a closed form in white noise: 2 |Kc| sd / sqrt(pi) per sample.
 */
export function valveTravelFromNoise(model: ProcessModel, controller: IdealPid, noise: { standardDeviation: number, interval: number, normal: () => number }): number {
  const samples = 400
  const substeps = controller.derivativeTime > 0 ? 4 : 1
  const { op } = simulateClosedLoop({ model, controller, horizon: samples * noise.interval, step: noise.interval / substeps, noise })
  let travel = 0
  for (let k = 1; k < op.length; k++) travel += Math.abs(op[k] - op[k - 1])
  return travel / (samples * noise.interval) * 3600
}
