import { seededRandom } from '../assessment/statistics/seededRandom'

/** A standard normal generator that starts the same each time, so that old and new tuning meet the same noise. */
export function noiseFor(seed = 20_261): () => number {
  const random = seededRandom(seed)
  return () => random.normal()
}
