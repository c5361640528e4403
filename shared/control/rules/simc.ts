import { seriesToIdeal } from '../forms/seriesToIdeal'
import type { PidTerms, ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const rule = 'SIMC'
const source = 'S. Skogestad (2003), Simple analytic rules for model reduction and PID controller tuning, J. Process Control 13:291-309'
const domain = 'Self-regulating or integrating processes; closed-loop time constant at least the effective dead time for good robustness. Derivative action only for a second lag larger than the dead time.'

/**
 * SIMC: Kc = tau / (K (tauC + theta)), Ti = min(tau, 4 (tauC + theta)); a second lag becomes the series derivative time,
 * or is taken into lag and dead time by the half rule where only PI is wanted.
 * @param closedLoopTime tauC, s, positive; the effective dead time when left out (the published choice)
 * @throws RangeError on a model that makes no sense, or a closed-loop time that is not positive
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, SIMC_*.
 */
export function simc(model: ProcessModel, options: { terms?: PidTerms, closedLoopTime?: number } = {}): RuleResult {
  const first = firstOrderModel(model)
  const terms = options.terms ?? (model.kind === 'sopdt' ? 'PID' : 'PI')
  if (terms === 'P') return { status: 'notApplicable', rule, source, reason: 'SIMC always uses integral action.' }
  const withDerivative = model.kind === 'sopdt' && terms === 'PID'
  const deadTime = withDerivative ? model.deadTime : first.deadTime
  const closedLoopTime = options.closedLoopTime ?? deadTime
  if (options.closedLoopTime !== undefined && !(closedLoopTime > 0)) throw new RangeError(`simc: the closed-loop time must be positive, got ${closedLoopTime}`)
  if (closedLoopTime + deadTime === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time, so the closed-loop time must be chosen.' }
  const total = closedLoopTime + deadTime
  const withinDomain = closedLoopTime >= deadTime * (1 - 1e-9)
  const answer = (controller: { controllerGain: number, integralTime: number, derivativeTime: number }, name = 'SIMC PI'): RuleResult =>
    ({ status: 'ok', rule: name, controller, closedLoopTime, source, domain, withinDomain })
  if (first.kind === 'integrating') return answer({ controllerGain: 1 / (first.processGain * total), integralTime: 4 * total, derivativeTime: 0 })
  if (withDerivative) {
    const large = Math.max(model.timeConstant, model.timeConstant2)
    const small = Math.min(model.timeConstant, model.timeConstant2)
    return answer(seriesToIdeal({ controllerGain: large / (model.processGain * total), integralTime: Math.min(large, 4 * total), derivativeTime: small }), 'SIMC PID')
  }
  return answer({ controllerGain: first.timeConstant / (first.processGain * total), integralTime: Math.min(first.timeConstant, 4 * total), derivativeTime: 0 })
}
