import type { ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'K. L. Chien, J. A. Hrones, J. B. Reswick (1952), On the automatic control of generalized passive systems, Trans. ASME 74:175-185 (table from memory)'

/**
 * Chien-Hrones-Reswick settings for set-point or load changes, without overshoot or with 20 % of it.
 * @throws RangeError on a model that makes no sense
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, CHR_*.
 */
export function chienHronesReswick(model: ProcessModel, options: { aim?: 'setpoint' | 'load', overshoot?: 0 | 20, terms?: 'PI' | 'PID' } = {}): RuleResult {
  const first = firstOrderModel(model)
  const { aim = 'load', overshoot = 0, terms = 'PI' } = options
  const rule = `Chien-Hrones-Reswick ${terms}, ${aim === 'load' ? 'load' : 'set point'}, ${overshoot === 0 ? 'no' : '20 %'} overshoot`
  if (first.kind === 'integrating') return { status: 'notApplicable', rule, source, reason: 'These published settings are for self-regulating processes.' }
  const { processGain, timeConstant: tau, deadTime: theta } = first
  if (theta === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time; the rule divides by it.' }
  const a = processGain * theta / tau
  const [gain, integralTime, derivativeTime] = aim === 'load'
    ? overshoot === 0
      ? terms === 'PI' ? [0.6, 4 * theta, 0] : [0.95, 2.4 * theta, 0.42 * theta]
      : terms === 'PI' ? [0.7, 2.3 * theta, 0] : [1.2, 2 * theta, 0.42 * theta]
    : overshoot === 0
      ? terms === 'PI' ? [0.35, 1.2 * tau, 0] : [0.6, tau, 0.5 * theta]
      : terms === 'PI' ? [0.6, tau, 0] : [0.95, 1.4 * tau, 0.47 * theta]
  return {
    status: 'ok', rule, controller: { controllerGain: gain / a, integralTime, derivativeTime }, closedLoopTime: null, source,
    domain: 'Dead time between a tenth of the lag and the lag.', withinDomain: theta >= 0.1 * tau && theta <= tau,
  }
}
