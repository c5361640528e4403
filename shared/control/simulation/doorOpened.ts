import type { Upset } from './simulateClosedLoop'

/**
 * A furnace door opened under load, as upsets for the simulation: cold air at the sensor at once, and heat lost for as long
 * as the door stands open (and a cold charge that takes heat afterwards).
 * @param at s, opening
 * @param openFor s
 * @param airDrop how far the sensor falls by the air alone, PV unit, positive
 * @param heatLoss OP that would balance the loss while open, OP unit, positive
 * @param chargeLoss OP that would balance the cold charge, OP unit, from the closing on for `chargeFor` s
 * @throws RangeError when a time is not positive or a size negative
 * Source: common practice, no source.
 */
export function doorOpened({ at, openFor, airDrop, heatLoss, chargeLoss = 0, chargeFor = 0 }: { at: number, openFor: number, airDrop: number, heatLoss: number, chargeLoss?: number, chargeFor?: number }): Upset[] {
  if (!(openFor > 0) || !(at >= 0) || [airDrop, heatLoss, chargeLoss, chargeFor].some(v => !(v >= 0))) throw new RangeError('doorOpened: times must be positive and sizes not negative')
  const upsets: Upset[] = [
    { at, until: at + openFor, size: -airDrop, enters: 'output', lagTime: openFor / 4 },
    { at, until: at + openFor, size: -heatLoss },
  ]
  if (chargeLoss > 0 && chargeFor > 0) upsets.push({ at: at + openFor, until: at + openFor + chargeFor, size: -chargeLoss })
  return upsets
}
