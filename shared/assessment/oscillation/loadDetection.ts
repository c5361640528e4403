import { signRuns } from './signRuns'

export interface LoadDetection {
  /** half-cycles with an integrated absolute error above the limit */
  loads: number
  /** largest value of the forgetting counter */
  highestCount: number
  /** sample at which the counter first passed the limit; null: never */
  firstDetection: number | null
  oscillating: boolean
  integralLimit: number
}

/**
 * Counts load disturbances: half-cycles of the error with an integrated absolute error above 2 a / omega; with forgetting
 * over 50 periods, more than 10 of them mean an oscillation. Looks at size, not at regularity: coarse noise triggers it
 * too. O(n). Throws RangeError unless amplitudeLimit, periodS and sampleIntervalS are above 0.
 * @param error control error, NaN neither adds nor ends a half-cycle
 * @param amplitudeLimit a: a sine of this amplitude and period just triggers; 1 % of the range is usual
 * @param periodS ultimate period; integral time x 2 pi where it is unknown
 * Source: Hägglund 1995, "A control-loop performance monitor". Fixture: fixtures/reference/oscillation.json.
 */
export function loadDetection(error: Float64Array, { amplitudeLimit, periodS, sampleIntervalS, countLimit = 10 }: {
  amplitudeLimit: number, periodS: number, sampleIntervalS: number, countLimit?: number
}): LoadDetection {
  for (const [name, value] of Object.entries({ amplitudeLimit, periodS, sampleIntervalS })) {
    if (!(value > 0)) throw new RangeError(`${name} must be above 0, got ${value}`)
  }
  const integralLimit = amplitudeLimit * periodS / Math.PI
  const forgetting = 1 - sampleIntervalS / (5 * countLimit * periodS)
  const { edges } = signRuns(error)
  let loads = 0, count = 0, highestCount = 0, at = 0
  let firstDetection: number | null = null
  for (let run = 0; run + 1 < edges.length; run++) {
    const end = edges[run + 1]
    let integral = 0
    for (let i = edges[run]; i < end; i++) if (error[i] === error[i]) integral += Math.abs(error[i]) * sampleIntervalS
    // A load is counted where its half-cycle ends; the last one has not ended.
    if (end === error.length || integral <= integralLimit) continue
    loads++
    count = count * forgetting ** (end - at) + 1
    at = end
    if (count > highestCount) highestCount = count
    if (firstDetection === null && count > countLimit) firstDetection = end
  }
  return { loads, highestCount, firstDetection, oscillating: firstDetection !== null, integralLimit }
}
