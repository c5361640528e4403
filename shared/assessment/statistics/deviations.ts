import { mean } from './mean'
import { requireFinite } from './requireFinite'

/**
 * Deviations from the mean; exact zeros for a constant record, whose mean need not be a representable number.
 *
 * @param x length >= 1, finite
 * @param name for the message
 * @param out where they go, length of x; a new array unless given
 * @returns out
 * @throws RangeError when x is empty or has a value that is not finite
 * Source: definition. Reference: through autocorrelation.
 */
export function deviations(x: Float64Array, name: string, out: Float64Array = new Float64Array(x.length)): Float64Array {
  const m = mean(x)
  // one value that is not finite makes the mean so; only then it is looked for
  if (!Number.isFinite(m)) requireFinite(x, name)
  const first = x[0]
  let i = 1
  while (i < x.length && x[i] === first) i++
  if (i === x.length) return out.fill(0)
  for (i = 0; i < x.length; i++) out[i] = x[i] - m
  return out
}
