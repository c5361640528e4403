/**
 * Which way the controller acts, from the record: a PI controller moves OP with the error and with its change, both by one sign. Set-ups
 * name the wrong action often enough, and a test that looks for "the jump that the output asked for" would then look the wrong way.
 *
 * Sum of the correlations of OP's steps with the error and with the error's steps; beyond +-0.3 it decides, else the set-up does.
 * Cost O(n). Source: ours, from the definition of PI control.
 *
 * @param error SP - PV, finite, regular, length n
 * @param op same length
 * @param fallback +1 where the set-up says reverse (OP rises with the error), -1 direct
 */
export function controllerSign(error: Float64Array, op: Float64Array, fallback: 1 | -1): 1 | -1 {
  const n = Math.min(error.length, op.length) - 1
  if (n < 50) return fallback
  let e = 0
  for (let i = 1; i <= n; i++) e += error[i]
  e /= n
  let uu = 0
  let ee = 0
  let dd = 0
  let ue = 0
  let ud = 0
  for (let i = 1; i <= n; i++) {
    const u = op[i] - op[i - 1]
    const d = error[i] - error[i - 1]
    const x = error[i] - e
    uu += u * u
    ee += x * x
    dd += d * d
    ue += u * x
    ud += u * d
  }
  const s = (ee > 0 && uu > 0 ? ue / Math.sqrt(uu * ee) : 0) + (dd > 0 && uu > 0 ? ud / Math.sqrt(uu * dd) : 0)
  return s > 0.3 ? 1 : s < -0.3 ? -1 : fallback
}
