import type { ProcessModel, RuleResult } from '../types'

const rule = 'Averaging level PI'
const source = 'S. Skogestad (2006), Tuning for smooth PID control with acceptable disturbance rejection, Ind. Eng. Chem. Res. 45:7817-7822; Ti = 4 / (k\' Kc) for a damping ratio of 1: Skogestad (2003)'
const domain = 'Integrating levels whose job is to smooth the flow: the largest upset uses the whole band allowed, no more. Not where the level itself must be held.'

/**
 * Averaging level control: the lowest gain that keeps the level within its band for the largest expected upset,
 * Kc = upset / deviation, with the integral time that gives a critically damped loop, Ti = 4 / (k' Kc).
 * With no dead time the deviation after a step upset then peaks at 2 / e = 0.736 of `allowedDeviation`.
 * @param model integrating; gain in PV unit per OP unit per second
 * @param largestUpset step in the flow, expressed in OP units (the OP change that would balance it), positive
 * @param allowedDeviation PV unit, positive
 * @throws RangeError when upset or deviation is not positive
 */
export function averagingLevel(model: ProcessModel, { largestUpset, allowedDeviation }: { largestUpset: number, allowedDeviation: number }): RuleResult {
  if (!(largestUpset > 0) || !(allowedDeviation > 0)) throw new RangeError(`averagingLevel: upset and deviation must be positive, got ${largestUpset}, ${allowedDeviation}`)
  if (model.kind !== 'integrating') return { status: 'notApplicable', rule, source, reason: 'The rule is for integrating processes, as levels are.' }
  const gain = largestUpset / allowedDeviation
  const speed = Math.abs(model.processGain) * gain
  return {
    status: 'ok', rule, controller: { controllerGain: Math.sign(model.processGain) * gain, integralTime: 4 / speed, derivativeTime: 0 }, closedLoopTime: 1 / speed, source, domain,
    // SIMC with this gain has tauC = 1 / (k' Kc) - theta; below one dead time it is no longer "smooth".
    withinDomain: 1 / speed >= 2 * model.deadTime,
  }
}
