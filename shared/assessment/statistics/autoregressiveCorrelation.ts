/** Once a whole order of lags in a row is below this, nothing that matters follows. */
const NEGLIGIBLE = 1e-6

/**
 * Theoretical autocorrelation of a stable autoregressive process, rho_0 = 1 .. at most rho_maxLag.
 *
 * Step-down recursion to the reflection coefficients (which also decides stability), step-up to rho_1..rho_p, then the
 * difference equation; it stops early when the correlation has died out.
 *
 * @param coefficients phi_1..phi_p
 * @param maxLag integer >= 0
 * @returns rho, length <= maxLag + 1; null when the process is not stable
 * Source: J. Durbin (1960) The fitting of time-series models; S. M. Kay (1988) Modern Spectral Estimation, section 6.3
 * (step-down). Reference: closed forms of first and second order in the test. Cost O(p^2 + lags p).
 */
export function autoregressiveCorrelation(coefficients: Float64Array, maxLag: number): Float64Array | null {
  const p = coefficients.length
  const byOrder: Float64Array[] = new Array(p + 1)
  byOrder[p] = coefficients
  for (let m = p; m >= 1; m--) {
    const current = byOrder[m]
    const k = current[m - 1]
    if (!(Math.abs(k) < 1)) return null
    const lower = new Float64Array(m - 1)
    for (let j = 0; j < m - 1; j++) lower[j] = (current[j] + k * current[m - 2 - j]) / (1 - k * k)
    byOrder[m - 1] = lower
  }
  const rho = new Float64Array(maxLag + 1)
  rho[0] = 1
  let error = 1
  let quiet = 0
  for (let m = 1; m <= maxLag; m++) {
    let sum = 0
    if (m <= p) {
      const lower = byOrder[m - 1]
      const k = byOrder[m][m - 1]
      sum = k * error
      for (let j = 1; j < m; j++) sum += lower[j - 1] * rho[m - j]
      error *= 1 - k * k
    } else {
      for (let j = 1; j <= p; j++) sum += coefficients[j - 1] * rho[m - j]
    }
    rho[m] = sum
    quiet = Math.abs(sum) < NEGLIGIBLE ? quiet + 1 : 0
    if (m >= p && quiet > p) return rho.subarray(0, m + 1)
  }
  return rho
}
