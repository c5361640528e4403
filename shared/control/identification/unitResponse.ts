/**
 * Response of a process of gain 1 to sampled OP, dead time exact to a fraction of a sample.
 * Starts at rest with the OP that stands at the start sample; what came before must be taken into account by the caller.
 * @param op evenly spaced, OP unit; samples before `start` feed the dead time
 * @param interval s
 * @param lags s: one or two lags, or none for an integrator (then the answer is the integral of OP from `start` on)
 * @param deadTime s, 0..start * interval
 * @param hold how OP moves between samples: `zero` in steps, `first` along straight lines
 * @param out answer, length of `op`; 0 before `start`
 * @throws RangeError when the dead time reaches before the first sample
 * Source: exact discretisation (Åström, Wittenmark, Computer-Controlled Systems). Two lags by partial fractions.
 */
export function unitResponse(op: Float64Array, interval: number, lags: readonly number[], deadTime: number, hold: 'zero' | 'first', start: number, out: Float64Array): Float64Array {
  const delay = deadTime / interval
  const whole = Math.floor(delay + 1e-9)
  const part = Math.max(0, delay - whole)
  // `zero` needs one sample more, because it looks at the interval that ends with the sample.
  if (!(deadTime >= 0) || whole + 1 + (part > 0 ? 1 : 0) > start + 1) throw new RangeError(`unitResponse: a dead time of ${deadTime} s reaches before the first sample`)
  out.fill(0, 0, start)
  const delayed = (k: number) => part === 0 ? op[k - whole] : (1 - part) * op[k - whole] + part * op[Math.max(0, k - whole - 1)]
  if (lags.length === 0) {
    let sum = 0
    out[start] = 0
    for (let k = start + 1; k < op.length; k++) {
      sum += interval * (hold === 'first' ? (delayed(k - 1) + delayed(k)) / 2 : (1 - part) * op[k - whole - 1] + part * op[Math.max(0, k - whole - 2)])
      out[k] = sum
    }
    return out
  }
  // Equal lags have no partial fractions; a part in 1,000 between them does not show.
  const [lag1, lag2] = lags.length === 1 ? lags : Math.abs(lags[0] - lags[1]) < 1e-3 * lags[0] ? [lags[0], lags[0] * (1 - 1e-3)] : lags
  const begin = delayed(start)
  for (let i = 0; i < lags.length; i++) {
    const lag = i === 0 ? lag1 : lag2
    const weight = lags.length === 1 ? 1 : i === 0 ? lag1 / (lag1 - lag2) : -lag2 / (lag1 - lag2)
    const f = Math.exp(-interval / lag)
    const mean = -Math.expm1(-interval / lag) * lag / interval
    const late = Math.exp(-(1 - part) * interval / lag)
    let x = begin
    out[start] = (i === 0 ? 0 : out[start]) + weight * x
    for (let k = start + 1; k < op.length; k++) {
      x = hold === 'first'
        ? f * x + (mean - f) * delayed(k - 1) + (1 - mean) * delayed(k)
        : f * x + (1 - late) * op[k - whole - 1] + (late - f) * op[Math.max(0, k - whole - 2)]
      out[k] = (i === 0 ? 0 : out[k]) + weight * x
    }
  }
  return out
}
