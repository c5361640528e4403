const HALF_WIDTH = 3
const WIDTH = 2 * HALF_WIDTH + 1
/** Windows looked at for the record's own scale. */
const SCALE_WINDOWS = 4096
/** Changes in no more than this share of a record at rest are no scale of its own: they are the spikes (ours). */
const RARE = 0.05
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
 * @param x regular samples, NaN: missing; nothing is judged within three samples of one, or of an end
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
  const window = new Float64Array(WIDTH)

  // the whole record's scale from evenly spread windows: enough for a floor, and a tenth of the work
  const stride = Math.max(1, Math.floor(n / SCALE_WINDOWS))
  const distances: number[] = []
  let looked = 0
  for (let i = HALF_WIDTH; i + HALF_WIDTH < n; i += stride) {
    if (!load(x, i, window)) continue
    looked++
    // where most samples repeat the one before, the zeros would make the scale 0 and every change a spike
    if (x[i] !== middle(window)) distances.push(Math.abs(x[i] - window[HALF_WIDTH]))
  }
  const overall = distances.length > RARE * looked ? MAD_TO_SD * Float64Array.from(distances).sort()[distances.length >> 1] : 0
  const least = threshold * Math.max(overall, quantum)

  const found: number[] = []
  for (let i = HALF_WIDTH; i + HALF_WIDTH < n; i++) {
    // no further from the median than from its farthest neighbour: most samples are done here
    let farthest = 0
    for (let j = i - HALF_WIDTH; j <= i + HALF_WIDTH; j++) {
      const d = Math.abs(x[j] - x[i])
      if (d > farthest) farthest = d
    }
    if (!(farthest > least) || !load(x, i, window)) continue
    const m = middle(window)
    const distance = Math.abs(x[i] - m)
    if (!(distance > least)) continue
    for (let j = 0; j < WIDTH; j++) window[j] = Math.abs(window[j] - m)
    if (distance > threshold * MAD_TO_SD * middle(window)) found.push(i)
  }
  return Int32Array.from(found)
}

/** The seven samples around i; false when one is missing: beside a gap a change of level cannot be told from a spike. */
function load(x: Float64Array, i: number, window: Float64Array): boolean {
  for (let j = 0; j < WIDTH; j++) {
    window[j] = x[i - HALF_WIDTH + j]
    if (window[j] !== window[j]) return false
  }
  return true
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
