/**
 * Impulse response psi_0 .. psi_(length-1) of 1 / (1 - phi_1 q^-1 - … - phi_p q^-p).
 *
 * @param coefficients phi_1..phi_p
 * @param length integer >= 1
 * @returns psi, psi_0 = 1
 * @throws RangeError on a length below 1
 * Source: definition; Box, Jenkins (1976) Time Series Analysis, section 3.1. Reference: fixtures/reference/harris.json.
 * Cost O(length p).
 */
export function impulseResponse(coefficients: Float64Array, length: number): Float64Array {
  if (!Number.isInteger(length) || length < 1) throw new RangeError(`impulse response needs a length of at least 1, got ${length}`)
  const psi = new Float64Array(length)
  psi[0] = 1
  for (let k = 1; k < length; k++) {
    let sum = 0
    for (let j = 1; j <= coefficients.length && j <= k; j++) sum += coefficients[j - 1] * psi[k - j]
    psi[k] = sum
  }
  return psi
}
