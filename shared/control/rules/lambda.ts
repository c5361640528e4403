import type { ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const rule = 'Lambda PI'
const source = 'E. B. Dahlin (1968), Designing and tuning digital controllers, Instruments and Control Systems 41(6):77-83; integrating: I.-L. Chien, P. S. Fruehauf (1990), Consider IMC tuning to improve controller performance, Chem. Eng. Progress 86(10):33-41 (formula from memory)'
const domain = 'Closed-loop time constant between one and three dead times or more; slow recovery from load upsets where the lag is much longer than the dead time.'

/**
 * Lambda tuning: Kc = tau / (K (lambda + theta)), Ti = tau; integrating: Kc = (2 lambda + theta) / (K' (lambda + theta)^2), Ti = 2 lambda + theta.
 * @param closedLoopTime lambda, s, positive; three dead times when left out (the usual cautious choice: common practice, no source)
 * @throws RangeError on a model that makes no sense, or a closed-loop time that is not positive
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, Lambda_*.
 */
export function lambda(model: ProcessModel, options: { closedLoopTime?: number } = {}): RuleResult {
  const first = firstOrderModel(model)
  const { deadTime } = first
  const closedLoopTime = options.closedLoopTime ?? 3 * deadTime
  if (options.closedLoopTime !== undefined && !(closedLoopTime > 0)) throw new RangeError(`lambda: the closed-loop time must be positive, got ${closedLoopTime}`)
  if (closedLoopTime === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time, so the closed-loop time must be chosen.' }
  const controller = first.kind === 'integrating'
    ? { controllerGain: (2 * closedLoopTime + deadTime) / (first.processGain * (closedLoopTime + deadTime) ** 2), integralTime: 2 * closedLoopTime + deadTime, derivativeTime: 0 }
    : { controllerGain: first.timeConstant / (first.processGain * (closedLoopTime + deadTime)), integralTime: first.timeConstant, derivativeTime: 0 }
  return { status: 'ok', rule, controller, closedLoopTime, source, domain, withinDomain: closedLoopTime >= deadTime * (1 - 1e-9) }
}
