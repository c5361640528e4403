import { solveSymmetric } from './solveSymmetric'

export interface NormalEquations { a: Float64Array, b: Float64Array }

/**
 * Variances that hold also where slow noise is left over that the noise model has missed: one Gauss-Newton step with each
 * block of time left out in turn; never below those of the Fisher information.
 * Source: delete-a-group jackknife, J. Shao, D. Tu (1995), The Jackknife and Bootstrap.
 */
export function jackknife(all: NormalEquations, blocks: NormalEquations[], fisher: Float64Array): Float64Array {
  const g = blocks.length
  const n = all.b.length
  const sum = new Float64Array(n)
  let used = 0
  for (const { a, b } of blocks) {
    const step = solveSymmetric(all.a.map((v, i) => v - a[i]), all.b.map((v, i) => v - b[i]), 1e-9)?.x
    if (!step) continue
    used++
    for (let i = 0; i < n; i++) sum[i] += step[i] ** 2
  }
  return fisher.map((v, i) => used < g / 2 ? v : Math.max(v, sum[i] * (g - 1) / g * g / used))
}

