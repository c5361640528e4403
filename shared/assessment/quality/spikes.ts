const HALF_WIDTH = 3
const WIDTH = 2 * HALF_WIDTH + 1
/** MAD of a normal variable is 0.6745 standard deviations. */
const MAD_TO_SD = 1.482602218505602

/**
 * Spikes: single samples, or up to three in a row, that stand out of their neighbourhood and come back.
 *
 * Hampel identifier on 7 samples: a sample is a spike when it lies more than `threshold` robust standard deviations from
 * the median of its window. The scale is the larger of the window's and of the whole record's (both from median
 * absolute deviations) and of the quantisation step, so that a quiet or coarsely resolved stretch does not call every
 * change a spike. A step in the signal moves the median with it and is none.
 *
 * @param x regular samples, NaN: missing (never a spike, not looked at in windows)
 * @param options threshold in robust standard deviations, > 0, default 6; quantum: quantisation step >= 0, default 0
 * @returns indices of spikes, ascending
 * @throws RangeError on options outside their range
 * Source: R. K. Pearson (2002) Outliers in process modeling and identification, IEEE Trans. Control Systems Technology
 * 10:55-63 (Hampel identifier); the floors of the scale are ours. Reference: constructed cases. Cost O(n).
 */
export function spikes(x: Float64Array, options: { threshold?: number, quantum?: number } = {}): Int32Array {
  const { threshold = 6, quantum = 0 } = options
  if (!(threshold > 0)) throw new RangeError(`threshold must be above 0, got ${threshold}`)
  if (!(quantum >= 0)) throw new RangeError(`quantum must be 0 or more, got ${quantum}`)
  const n = x.length
  const distance = new Float64Array(n)
  const local = new Float64Array(n)
  const window = new Float64Array(WIDTH)
  for (let i = 0; i < n; i++) {
    let count = 0
    for (let j = Math.max(0, i - HALF_WIDTH); j <= Math.min(n - 1, i + HALF_WIDTH); j++) if (x[j] === x[j]) window[count++] = x[j]
    // at an end, or beside a gap, a change of level cannot be told from a spike
    if (x[i] !== x[i] || count < WIDTH) {
      distance[i] = NaN
      continue
    }
    const m = middle(window)
    distance[i] = Math.abs(x[i] - m)
    for (let j = 0; j < WIDTH; j++) window[j] = Math.abs(window[j] - m)
    local[i] = MAD_TO_SD * middle(window)
  }
  const known = distance.filter(v => v === v).sort()
  const overall = known.length > 0 ? MAD_TO_SD * known[known.length >> 1] : 0
  const found: number[] = []
  for (let i = 0; i < n; i++) if (distance[i] > threshold * Math.max(local[i], overall, quantum)) found.push(i)
  return Int32Array.from(found)
}

/** Median of the seven values; sorts them in place (insertion: seven values in a hot loop). */
function middle(w: Float64Array): number {
  for (let i = 1; i < WIDTH; i++) {
    const v = w[i]
    let j = i - 1
    while (j >= 0 && w[j] > v) {
      w[j + 1] = w[j]
      j--
    }
    w[j + 1] = v
  }
  return w[HALF_WIDTH]
}
