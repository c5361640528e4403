/**
 * Solves A x = b and inverts A for a symmetric positive definite A, by Cholesky on the matrix scaled to a unit diagonal.
 * @param a row-major n x n
 * @param b length n
 * @param damping added to the scaled diagonal (Levenberg-Marquardt); 0 or more
 * @returns null when A is not positive definite to working accuracy
 * Source: Golub, Van Loan, Matrix Computations, 4.2.
 */
export function solveSymmetric(a: Float64Array, b: Float64Array, damping = 0): { x: Float64Array, inverse: () => Float64Array } | null {
  const n = b.length
  const scale = new Float64Array(n)
  for (let i = 0; i < n; i++) {
    if (!(a[i * n + i] > 0)) return null
    scale[i] = 1 / Math.sqrt(a[i * n + i])
  }
  const l = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = a[i * n + j] * scale[i] * scale[j] + (i === j ? damping : 0)
      for (let k = 0; k < j; k++) sum -= l[i * n + k] * l[j * n + k]
      if (i === j) {
        if (!(sum > 1e-13)) return null
        l[i * n + i] = Math.sqrt(sum)
      }
      else l[i * n + j] = sum / l[j * n + j]
    }
  }
  const solve = (right: Float64Array) => {
    const x = new Float64Array(n)
    for (let i = 0; i < n; i++) {
      let sum = right[i] * scale[i]
      for (let k = 0; k < i; k++) sum -= l[i * n + k] * x[k]
      x[i] = sum / l[i * n + i]
    }
    for (let i = n - 1; i >= 0; i--) {
      let sum = x[i]
      for (let k = i + 1; k < n; k++) sum -= l[k * n + i] * x[k]
      x[i] = sum / l[i * n + i]
    }
    for (let i = 0; i < n; i++) x[i] *= scale[i]
    return x
  }
  return {
    x: solve(b),
    inverse: () => {
      const inverse = new Float64Array(n * n)
      const unit = new Float64Array(n)
      for (let j = 0; j < n; j++) {
        unit.fill(0)
        unit[j] = 1
        const column = solve(unit)
        for (let i = 0; i < n; i++) inverse[i * n + j] = column[i]
      }
      return inverse
    },
  }
}
