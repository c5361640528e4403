/**
 * Gain and proportional band are each other's inverse: PB % = 100 / gain, gain in % of OP span per % of PV span.
 * Works in both directions.
 * @throws RangeError when the value is not positive
 * Source: IEC 60050-351 (proportional band). Fixture: fixtures/reference/tuning.json, conv_units.
 */
export function gainOrProportionalBand(value: number): number {
  if (!(value > 0)) throw new RangeError(`gainOrProportionalBand: must be positive, got ${value}`)
  return 100 / value
}

/**
 * Controller gain in OP units per PV unit of a gain in % per %.
 * @param gain % of OP span per % of PV span
 * @param pvSpan PV unit, positive
 * @param opSpan OP unit, positive
 * @throws RangeError when a span is not positive
 * Source: definition. Fixture: fixtures/reference/tuning.json, conv_units.
 */
export function gainToEngineeringUnits(gain: number, pvSpan: number, opSpan: number): number {
  if (!(pvSpan > 0) || !(opSpan > 0)) throw new RangeError(`gainToEngineeringUnits: spans must be positive, got ${pvSpan}, ${opSpan}`)
  return gain * opSpan / pvSpan
}

/** The way back of `gainToEngineeringUnits`; same arguments and errors. It also turns a process gain in % per % into PV unit per OP unit. */
export function gainFromEngineeringUnits(gain: number, pvSpan: number, opSpan: number): number {
  if (!(pvSpan > 0) || !(opSpan > 0)) throw new RangeError(`gainFromEngineeringUnits: spans must be positive, got ${pvSpan}, ${opSpan}`)
  return gain * pvSpan / opSpan
}
