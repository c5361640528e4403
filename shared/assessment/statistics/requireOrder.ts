import type { OrderChoice } from './autoregressiveModel'

/**
 * The largest order of a choice, after checking it against the record's length.
 *
 * @param choice order or maxOrder, integer >= 0
 * @param limit largest order that the estimator can fit to the record
 * @returns that integer
 * @throws RangeError when it is no integer from 0 to limit
 */
export function requireOrder(choice: OrderChoice, limit: number): number {
  const order = 'order' in choice ? choice.order : choice.maxOrder
  if (!Number.isInteger(order) || order < 0 || order > limit) throw new RangeError(`autoregressive order must be an integer from 0 to ${limit} for this record, got ${order}`)
  return order
}
