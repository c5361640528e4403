import type { ProcessModel } from '../types'

/**
 * First order plus dead time by the half rule: half of the smaller lag goes to the lag, half to the dead time.
 * Models of first order and integrating ones go through unchanged.
 * @throws RangeError when a lag or the dead time is negative, or the gain 0
 * Source: Skogestad (2003), Simple analytic rules for model reduction and PID controller tuning, J. Process Control 13:291-309.
 * Fixture: fixtures/reference/tuning.json, P3/ultimate.
 */
export function firstOrderModel(model: ProcessModel): Exclude<ProcessModel, { kind: 'sopdt' }> {
  if (!model.processGain || !Number.isFinite(model.processGain)) throw new RangeError(`firstOrderModel: the process gain must be a number other than 0, got ${model.processGain}`)
  if (!(model.deadTime >= 0)) throw new RangeError(`firstOrderModel: the dead time must not be negative, got ${model.deadTime}`)
  if (model.kind === 'integrating') return model
  if (!(model.timeConstant > 0)) throw new RangeError(`firstOrderModel: the time constant must be positive, got ${model.timeConstant}`)
  if (model.kind === 'fopdt') return model
  if (!(model.timeConstant2 >= 0)) throw new RangeError(`firstOrderModel: the second time constant must not be negative, got ${model.timeConstant2}`)
  const large = Math.max(model.timeConstant, model.timeConstant2)
  const small = Math.min(model.timeConstant, model.timeConstant2)
  return { kind: 'fopdt', processGain: model.processGain, timeConstant: large + small / 2, deadTime: model.deadTime + small / 2 }
}
