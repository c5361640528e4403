import type { PidTerms, ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'G. H. Cohen, G. A. Coon (1953), Theoretical consideration of retarded control, Trans. ASME 75:827-834'

/**
 * Cohen-Coon settings from the ratio r = theta / tau.
 * @throws RangeError on a model that makes no sense
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, CohenCoon_*.
 */
export function cohenCoon(model: ProcessModel, options: { terms?: PidTerms } = {}): RuleResult {
  const first = firstOrderModel(model)
  const terms = options.terms ?? 'PI'
  const rule = `Cohen-Coon ${terms}`
  if (first.kind === 'integrating') return { status: 'notApplicable', rule, source, reason: 'These published settings are for self-regulating processes.' }
  const { processGain: K, timeConstant, deadTime: theta } = first
  if (theta === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time; the rule divides by it.' }
  const r = theta / timeConstant
  const controller = terms === 'P'
    ? { controllerGain: (1 + r / 3) / (K * r), integralTime: Infinity, derivativeTime: 0 }
    : terms === 'PI'
      ? { controllerGain: (0.9 + r / 12) / (K * r), integralTime: theta * (30 + 3 * r) / (9 + 20 * r), derivativeTime: 0 }
      : { controllerGain: (4 / 3 + r / 4) / (K * r), integralTime: theta * (32 + 6 * r) / (13 + 8 * r), derivativeTime: 4 * theta / (11 + 2 * r) }
  return {
    status: 'ok', rule, controller, closedLoopTime: null, source,
    domain: 'Dead time between a tenth of the lag and the lag; aims at quarter decay, so it oscillates and has little robustness. For comparison, not as advice.',
    withinDomain: r >= 0.1 && r <= 1,
  }
}
