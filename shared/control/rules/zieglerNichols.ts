import { ultimatePoint } from '../margins/ultimatePoint'
import type { PidTerms, ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'J. G. Ziegler, N. B. Nichols (1942), Optimum settings for automatic controllers, Trans. ASME 64:759-768'
const domain = 'Dead time between a tenth of the lag and the lag; aims at quarter decay, so it oscillates and has little robustness. For comparison, not as advice.'

/**
 * Ziegler-Nichols settings: `openLoop` from lag and dead time (a = K theta / tau), `closedLoop` from the model's ultimate gain and period.
 * @throws RangeError on a model that makes no sense
 * Source: see `source`; open-loop PI with Ti = theta / 0.3 as in the paper. Fixture: fixtures/reference/tuning.json, ZN_*.
 */
export function zieglerNichols(model: ProcessModel, options: { method?: 'openLoop' | 'closedLoop', terms?: PidTerms } = {}): RuleResult {
  const first = firstOrderModel(model)
  const terms = options.terms ?? 'PI'
  const method = options.method ?? 'closedLoop'
  const rule = `Ziegler-Nichols ${method === 'openLoop' ? 'open loop' : 'closed loop'} ${terms}`
  const ratio = first.kind === 'integrating' ? 0.5 : first.deadTime / first.timeConstant
  const withinDomain = ratio >= 0.1 && ratio <= 1
  const answer = (controllerGain: number, integralTime = Infinity, derivativeTime = 0): RuleResult =>
    ({ status: 'ok', rule, controller: { controllerGain, integralTime, derivativeTime }, closedLoopTime: null, source, domain, withinDomain })
  if (method === 'closedLoop') {
    const point = ultimatePoint(model)
    if (!point) return { status: 'notApplicable', rule, source, reason: 'The model has no ultimate gain: it cannot be made to oscillate by proportional action.' }
    const { gain, period } = point
    return terms === 'P' ? answer(0.5 * gain) : terms === 'PI' ? answer(0.45 * gain, period / 1.2) : answer(0.6 * gain, period / 2, period / 8)
  }
  if (first.deadTime === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time; the rule divides by it.' }
  const theta = first.deadTime
  const a = first.kind === 'integrating' ? first.processGain * theta : first.processGain * theta / first.timeConstant
  return terms === 'P' ? answer(1 / a) : terms === 'PI' ? answer(0.9 / a, theta / 0.3) : answer(1.2 / a, 2 * theta, theta / 2)
}
