/** Samples from..to - 1. */
export interface IndexSpan { from: number, to: number }

/**
 * Stretches in which the process variable stands still to the last digit while something should have moved it.
 *
 * A stretch counts when it lasts longer than the horizon and, within it, the output's range exceeds 2 % of its span or
 * the set point moves. A quiet loop whose PV and OP both rest is not frozen. A missing PV ends a stretch.
 *
 * @param t epoch ms, ascending, length n
 * @param pv length n, NaN: missing
 * @param op length n or null, NaN: missing
 * @param sp length n or null, NaN: missing
 * @param options horizonS > 0: the loop's settling horizon, s; opSpan > 0: span of the output; opFraction of it, 0.02
 * @returns spans, ascending, without overlap
 * @throws RangeError on unequal lengths or options outside their range
 * Source: common practice, no source (2 % and the horizon are our defaults). Reference: constructed cases. Cost O(n).
 */
export function frozenSpans(
  t: Float64Array, pv: Float64Array, op: Float64Array | null, sp: Float64Array | null,
  options: { horizonS: number, opSpan: number, opFraction?: number },
): IndexSpan[] {
  const { horizonS, opSpan, opFraction = 0.02 } = options
  const n = t.length
  if (pv.length !== n || (op && op.length !== n) || (sp && sp.length !== n)) throw new RangeError(`t, pv, op and sp must have one length, got ${n}, ${pv.length}, ${op ? op.length : 'none'}, ${sp ? sp.length : 'none'}`)
  if (!(horizonS > 0)) throw new RangeError(`horizonS must be above 0, got ${horizonS}`)
  if (!(opSpan > 0)) throw new RangeError(`opSpan must be above 0, got ${opSpan}`)
  const spans: IndexSpan[] = []
  for (let from = 0; from < n;) {
    let to = from + 1
    while (to < n && pv[to] === pv[from]) to++
    if (t[to - 1] - t[from] > 1000 * horizonS) {
      if ((op && range(op, from, to) > opFraction * opSpan) || (sp && range(sp, from, to) > 0)) spans.push({ from, to })
    }
    from = to
  }
  return spans
}

/** Largest minus smallest known value; 0 when there are none. */
function range(x: Float64Array, from: number, to: number): number {
  let low = Infinity
  let high = -Infinity
  for (let i = from; i < to; i++) {
    if (x[i] < low) low = x[i]
    if (x[i] > high) high = x[i]
  }
  return high > low ? high - low : 0
}
