import { signRuns } from './signRuns'

/**
 * Share h of zero crossings whose half-cycles resemble the previous one of the same sign in area (within a factor
 * `areaSimilarity`) and duration (`durationSimilarity`). Above 0.4 worth a closer look, above 0.8 a very distinct
 * oscillation. Only complete half-cycles count. Noise hides everything: filter first. O(n).
 * Throws RangeError unless both similarities lie in (0, 1).
 * @returns h in [0, 1); NaN below 3 crossings
 * Source: Forsman, Stattin 1999, "A new criterion for detecting oscillations in control loops".
 * Fixture: fixtures/reference/oscillation.json.
 */
export function areaRegularity(error: Float64Array, { areaSimilarity = 0.6, durationSimilarity = 0.75 } = {}): number {
  for (const [name, value] of Object.entries({ areaSimilarity, durationSimilarity })) {
    if (!(value > 0 && value < 1)) throw new RangeError(`${name} must lie in (0, 1), got ${value}`)
  }
  const { edges } = signRuns(error)
  const crossings = edges.length - 2
  if (crossings < 3) return Number.NaN
  const area = (run: number) => {
    let sum = 0
    for (let i = edges[run]; i < edges[run + 1]; i++) sum += Math.abs(error[i])
    return sum
  }
  const alike = (ratio: number, limit: number) => ratio > limit && ratio < 1 / limit
  let similar = 0
  for (let run = 3; run + 2 < edges.length; run++) {
    const duration = (r: number) => edges[r + 1] - edges[r]
    if (alike(area(run) / area(run - 2), areaSimilarity) && alike(duration(run) / duration(run - 2), durationSimilarity)) similar++
  }
  return similar / crossings
}
