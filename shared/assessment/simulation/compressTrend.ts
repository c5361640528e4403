/**
 * Which samples a historian archives, by boxcar or by swinging door; first and last are always kept. One pass, O(n).
 *
 * Boxcar: a sample that leaves a band of +- deviation around the last archived value makes the one before it archived.
 * Swinging door: the last archived value is the pivot of two doors through +- deviation of each new sample; when they
 * open beyond parallel, the sample before is archived and becomes the pivot. Missing values (NaN) are always archived.
 *
 * @param t times, s, ascending, length n
 * @param x values, length n
 * @param deviation >= 0, unit of x
 * @param longestS longest time between archived samples, s
 * @returns 1 where archived, else 0; length n
 * @throws RangeError on lengths that differ or a negative deviation
 * Source: J. C. Hale, H. L. Sellars (1981) Historical data recording for process computers, Chem. Eng. Progress 77(11):38-43
 * (boxcar); E. H. Bristol (1990) Swinging door trending: adaptive trend recording? ISA National Conf. Proc., 749-753.
 */
export function compressTrend(technique: 'boxcar' | 'swingingDoor', t: ArrayLike<number>, x: ArrayLike<number>, deviation: number, longestS: number): Uint8Array {
  const n = x.length
  if (t.length !== n) throw new RangeError(`times and values must have one length, got ${t.length} and ${n}`)
  if (!(deviation >= 0)) throw new RangeError(`deviation must be >= 0, got ${deviation}`)
  const kept = new Uint8Array(n)
  if (n === 0) return kept
  let pivot = 0
  let steepest = -Infinity
  let flattest = Infinity
  kept[0] = 1
  for (let i = 1; i < n; i++) {
    if (Number.isNaN(x[i]) || Number.isNaN(x[pivot])) {
      kept[i - 1] = kept[i] = 1
      pivot = i
      steepest = -Infinity
      flattest = Infinity
      continue
    }
    let leave: boolean
    if (technique === 'boxcar') leave = Math.abs(x[i] - x[pivot]) > deviation
    else {
      const dt = t[i] - t[pivot]
      steepest = Math.max(steepest, (x[i] - deviation - x[pivot]) / dt)
      flattest = Math.min(flattest, (x[i] + deviation - x[pivot]) / dt)
      leave = steepest > flattest
    }
    if (!leave && t[i] - t[pivot] < longestS) continue
    pivot = leave && i - 1 > pivot ? i - 1 : i
    kept[pivot] = 1
    steepest = -Infinity
    flattest = Infinity
    if (pivot < i) {
      if (technique === 'boxcar') { if (Math.abs(x[i] - x[pivot]) > deviation) { kept[i] = 1; pivot = i } }
      else {
        const dt = t[i] - t[pivot]
        steepest = (x[i] - deviation - x[pivot]) / dt
        flattest = (x[i] + deviation - x[pivot]) / dt
      }
    }
  }
  kept[n - 1] = 1
  return kept
}
