import type { ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'K. J. Åström, T. Hägglund (2004), Revisiting the Ziegler-Nichols step response method for PID control, J. Process Control 14:635-650; Advanced PID Control (2006)'

/**
 * AMIGO settings for PI and PID, with the published set-point weight for PID (0 where lag dominates, else 1).
 * The controller gain keeps the sign of the process gain.
 * @throws RangeError on a model that makes no sense
 * Source: see `source`. Fixture: fixtures/reference/tuning.json, AMIGO_*.
 */
export function amigo(model: ProcessModel, options: { terms?: 'PI' | 'PID' } = {}): RuleResult {
  const first = firstOrderModel(model)
  const terms = options.terms ?? 'PI'
  const rule = `AMIGO ${terms}`
  const { processGain: K, deadTime: L } = first
  if (L === 0) return { status: 'notApplicable', rule, source, reason: 'The model has no dead time; the rule divides by it.' }
  if (first.kind === 'integrating') {
    const controller = terms === 'PI'
      ? { controllerGain: 0.35 / (K * L), integralTime: 13.4 * L, derivativeTime: 0 }
      : { controllerGain: 0.45 / (K * L), integralTime: 8 * L, derivativeTime: 0.5 * L, setpointWeight: 0 }
    return { status: 'ok', rule, controller, closedLoopTime: null, source, domain: 'Integrating processes with dead time.', withinDomain: true }
  }
  const T = first.timeConstant
  const relativeDeadTime = L / (L + T)
  const controller = terms === 'PI'
    ? { controllerGain: 0.15 / K + (0.35 - L * T / (L + T) ** 2) * T / (K * L), integralTime: 0.35 * L + 13 * L * T * T / (T * T + 12 * L * T + 7 * L * L), derivativeTime: 0 }
    : { controllerGain: (0.2 + 0.45 * T / L) / K, integralTime: (0.4 * L + 0.8 * T) / (L + 0.1 * T) * L, derivativeTime: 0.5 * L * T / (0.3 * L + T), setpointWeight: relativeDeadTime <= 0.5 ? 0 : 1 }
  return {
    status: 'ok', rule, controller, closedLoopTime: null, source,
    domain: terms === 'PI' ? 'Monotone step responses, any ratio of dead time to lag.' : 'Monotone step responses; conservative where the dead time is below 30 % of dead time plus lag.',
    withinDomain: terms === 'PI' || relativeDeadTime >= 0.3,
  }
}
