/**
 * Half-cycles of a signal: where runs of one sign begin. Zero counts as the sign before it (at the start as positive), NaN
 * likewise. O(n).
 * @returns begins of the runs and, last, the length of the signal: run i is [edges[i], edges[i + 1]); `firstSign` is the
 * sign of run 0, signs alternate. Length at least 2 unless the signal is empty ([0]).
 */
export function signRuns(signal: Float64Array): { edges: Int32Array, firstSign: 1 | -1 } {
  const edges: number[] = [0]
  const firstSign = signal[0] < 0 ? -1 : 1
  let sign: number = firstSign
  for (let i = 1; i < signal.length; i++) {
    const value = signal[i]
    if (value * sign < 0) { sign = -sign; edges.push(i) }
  }
  if (signal.length) edges.push(signal.length)
  return { edges: Int32Array.from(edges), firstSign }
}
