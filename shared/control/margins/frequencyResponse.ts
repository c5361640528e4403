import type { IdealPid, ProcessModel } from '../types'

/**
 * Frequency response of the open loop, model x controller, dead time exact, phase continuous in frequency.
 * @param omega rad/s, positive
 * @returns magnitude and phase (rad) of L(j omega); the phase counts the controller as acting the right way round
 * @throws RangeError when omega is not positive
 * Source: definition; derivative filter Td/N (Infinity: none), measurement filter first order.
 * Fixture: fixtures/reference/tuning.json (w180, wc).
 */
export function frequencyResponse(model: ProcessModel, controller: IdealPid, omega: number): { magnitude: number, phase: number } {
  if (!(omega > 0)) throw new RangeError(`frequencyResponse: omega must be positive, got ${omega}`)
  const { controllerGain, integralTime, derivativeTime, derivativeFilterFactor = 10, measurementFilterTime = 0 } = controller
  let magnitude = Math.abs(model.processGain * controllerGain)
  let phase = -omega * model.deadTime
  if (model.kind === 'integrating') {
    magnitude /= omega
    phase -= Math.PI / 2
  }
  else {
    magnitude /= Math.sqrt(1 + (omega * model.timeConstant) ** 2)
    phase -= Math.atan(omega * model.timeConstant)
    if (model.kind === 'sopdt') {
      magnitude /= Math.sqrt(1 + (omega * model.timeConstant2) ** 2)
      phase -= Math.atan(omega * model.timeConstant2)
    }
  }
  if (measurementFilterTime > 0) {
    magnitude /= Math.sqrt(1 + (omega * measurementFilterTime) ** 2)
    phase -= Math.atan(omega * measurementFilterTime)
  }
  let real = 1
  let imaginary = integralTime === Infinity ? 0 : -1 / (omega * integralTime)
  if (derivativeTime > 0) {
    const x = omega * derivativeTime
    const f = x / derivativeFilterFactor
    real += x * f / (1 + f * f)
    imaginary += x / (1 + f * f)
  }
  return { magnitude: magnitude * Math.sqrt(real * real + imaginary * imaginary), phase: phase + Math.atan2(imaginary, real) }
}
