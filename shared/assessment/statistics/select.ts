/**
 * The value that would stand at index k if `a` were sorted, by Hoare's selection; reorders `a`. Expected cost O(n).
 *
 * @param a length n >= 1, without NaN
 * @param k integer 0..n-1
 * Source: C. A. R. Hoare (1961) Algorithm 65: Find, Communications of the ACM 4:321-322.
 */
export function select(a: Float64Array, k: number): number {
  let low = 0
  let high = a.length - 1
  while (low < high) {
    const pivot = a[(low + high) >> 1]
    let i = low
    let j = high
    while (i <= j) {
      while (a[i] < pivot) i++
      while (a[j] > pivot) j--
      if (i <= j) {
        const swap = a[i]
        a[i] = a[j]
        a[j] = swap
        i++
        j--
      }
    }
    if (k <= j) high = j
    else if (k >= i) low = i
    else break
  }
  return a[k]
}
