import { ultimatePoint } from '../margins/ultimatePoint'
import type { ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'B. D. Tyreus, W. L. Luyben (1992), Tuning PI controllers for integrator/dead time processes, Ind. Eng. Chem. Res. 31:2625-2628; PID: Luyben, Luyben (1997), Essentials of Process Control'

/**
 * Tyreus-Luyben settings from the model's ultimate gain and period: PI Ku / 3.2, 2.2 Pu; PID Ku / 2.2, 2.2 Pu, Pu / 6.3.
 * @throws RangeError on a model that makes no sense
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, TyreusLuyben_*.
 */
export function tyreusLuyben(model: ProcessModel, options: { terms?: 'PI' | 'PID' } = {}): RuleResult {
  const first = firstOrderModel(model)
  const terms = options.terms ?? 'PI'
  const rule = `Tyreus-Luyben ${terms}`
  const point = ultimatePoint(model)
  if (!point) return { status: 'notApplicable', rule, source, reason: 'The model has no ultimate gain: it cannot be made to oscillate by proportional action.' }
  const controller = terms === 'PI'
    ? { controllerGain: point.gain / 3.2, integralTime: 2.2 * point.period, derivativeTime: 0 }
    : { controllerGain: point.gain / 2.2, integralTime: 2.2 * point.period, derivativeTime: point.period / 6.3 }
  return {
    status: 'ok', rule, controller, closedLoopTime: null, source,
    domain: 'Integrating and lag-dominated processes; sluggish where the dead time is of the size of the lag.',
    withinDomain: first.kind === 'integrating' || first.deadTime <= 0.5 * first.timeConstant,
  }
}
