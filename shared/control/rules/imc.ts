import type { ProcessModel, RuleResult } from '../types'
import { firstOrderModel } from './firstOrderModel'

const source = 'D. E. Rivera, M. Morari, S. Skogestad (1986), Internal model control 4: PID controller design, Ind. Eng. Chem. Process Des. Dev. 25:252-265'
const names = { pi: 'IMC PI', improvedPi: 'IMC improved PI', pid: 'IMC PID' }

/**
 * IMC: `pi` Kc = tau / (K eps), Ti = tau; `improvedPi` Kc = (2 tau + theta) / (2 K eps), Ti = tau + theta / 2;
 * `pid` Kc = (2 tau + theta) / (K (2 eps + theta)), Ti = tau + theta / 2, Td = tau theta / (2 tau + theta).
 * @param filterTime eps, s, positive; the smallest published when left out (1.7 theta for PI; 0.8 theta and 0.1 tau for PID)
 * @throws RangeError on a model that makes no sense, or a filter time that is not positive
 * Source: see `source` (limits from memory). Fixture: fixtures/reference/tuning.json, IMC_*.
 */
export function imc(model: ProcessModel, options: { variant?: keyof typeof names, filterTime?: number } = {}): RuleResult {
  const first = firstOrderModel(model)
  const variant = options.variant ?? 'pi'
  const rule = names[variant]
  if (first.kind === 'integrating') return { status: 'notApplicable', rule, source, reason: 'These published settings are for self-regulating processes.' }
  const { processGain: K, timeConstant: tau, deadTime: theta } = first
  const smallest = variant === 'pid' ? Math.max(0.8 * theta, 0.1 * tau) : Math.max(1.7 * theta, 0.1 * tau)
  const filterTime = options.filterTime ?? smallest
  if (!(filterTime > 0)) throw new RangeError(`imc: the filter time must be positive, got ${filterTime}`)
  const controller = variant === 'pi'
    ? { controllerGain: tau / (K * filterTime), integralTime: tau, derivativeTime: 0 }
    : variant === 'improvedPi'
      ? { controllerGain: (2 * tau + theta) / (2 * K * filterTime), integralTime: tau + theta / 2, derivativeTime: 0 }
      : { controllerGain: (2 * tau + theta) / (K * (2 * filterTime + theta)), integralTime: tau + theta / 2, derivativeTime: tau * theta / (2 * tau + theta) }
  return {
    status: 'ok', rule, controller, closedLoopTime: filterTime, source,
    domain: variant === 'pid' ? 'Self-regulating processes; filter time above 0.8 dead times and above a tenth of the lag.' : 'Self-regulating processes; filter time above 1.7 dead times.',
    withinDomain: filterTime >= smallest * (1 - 1e-9),
  }
}
