import type { ProcessModel } from '../types'

/**
 * Ultimate gain and period of a model under proportional action, dead time exact: where its phase is -180 degrees.
 * @returns gain (sign of the process gain), period s, frequency rad/s; null when the phase never gets there
 * @throws RangeError when dead time or lag is negative
 * Source: definition (Ziegler, Nichols 1942). Fixture: fixtures/reference/tuning.json, * /ultimate.
 */
export function ultimatePoint(model: ProcessModel): { gain: number, period: number, frequency: number } | null {
  const { deadTime } = model
  if (!(deadTime >= 0)) throw new RangeError(`ultimatePoint: the dead time must not be negative, got ${deadTime}`)
  if (deadTime === 0) return null
  const lags = model.kind === 'integrating' ? [] : model.kind === 'fopdt' ? [model.timeConstant] : [model.timeConstant, model.timeConstant2]
  const phase = (w: number) => -w * deadTime - (model.kind === 'integrating' ? Math.PI / 2 : 0) - lags.reduce((sum, lag) => sum + Math.atan(w * lag), 0)
  let low = 0
  let high = Math.PI / deadTime
  for (let i = 0; i < 200 && high - low > 1e-16 * high; i++) {
    const middle = (low + high) / 2
    if (phase(middle) > -Math.PI) low = middle
    else high = middle
  }
  const frequency = (low + high) / 2
  let gain = 1 / model.processGain
  if (model.kind === 'integrating') gain *= frequency
  for (const lag of lags) gain *= Math.hypot(1, frequency * lag)
  return { gain, period: 2 * Math.PI / frequency, frequency }
}
