import { insufficient, type Insufficient } from '../types'
import type { SeededRandom } from '../statistics/seededRandom'
import { surrogate } from '../statistics/surrogate'
import { bicoherence } from './bicoherence'

export interface NonlinearityTest {
  status: 'ok'
  /** (1 + surrogates at or above the record) / (1 + surrogates), in (0, 1] */
  pValue: number
  /** surrogates below the record, 0..surrogates */
  rank: number
  surrogates: number
  /** distance from the surrogates' mean in their standard deviations */
  effect: number
  /** unevenness of the record's squared bicoherence: standard deviation over mean across the triangle */
  unevenness: number
  surrogateMean: number
  surrogateSd: number
  segments: number
}

/** Fewer segments leave nothing but chance in the bicoherence (ours). */
const FEWEST_SEGMENTS = 16

/**
 * Does the record hold more phase coupling than a linear process of its own spectrum and values would?
 *
 * The bicoherence of a linear process is the same at every pair of frequencies; peaks in it mean nonlinearity. The
 * statistic is how uneven it is: standard deviation over mean of the squared bicoherence. It is compared with that of
 * surrogates of the same spectrum and value distribution instead of with the limits published for the index of
 * Choudhury and others (2004), which, with plain averaging, call every linear record of non-Gaussian noise nonlinear
 * (verified). Mean or largest bicoherence against the same surrogates were tried as well: the mean calls 75 % of
 * linear records of exponential noise nonlinear, the unevenness none of 24.
 *
 * Blind, like the bicoherence itself, to symmetric wave forms (square, triangle): a large p-value does not prove
 * linearity. A strictly periodic record of few samples needs whole periods (see surrogate).
 *
 * @param x finite, regular samples
 * @param options random: seeded source, moved on; segmentLength as for bicoherence, default 64; surrogates >= 9,
 *   default 39 (the smallest p-value is 1 / 40); iterations of each surrogate, default 10
 * @returns p-value, rank and effect; insufficient when there are fewer than 16 segments or no movement
 * @throws RangeError on values that are not finite or options outside their range
 * Source: Choudhury, Shah, Thornhill (2004), Automatica 40:1719-1728 (flat bicoherence of linear processes); J. Theiler
 * and others (1992) Testing for nonlinearity in time series: the method of surrogate data, Physica D 58:77-94; T.
 * Schreiber, A. Schmitz (1996). The statistic is ours. Reference: fixtures/reference/bicoherence.json (records of known
 * making), seeded rates in the test. Cost O(surrogates (iterations n log n + n segmentLength / 16)).
 */
export function nonlinearityTest(
  x: Float64Array,
  options: { random: SeededRandom, segmentLength?: number, surrogates?: number, iterations?: number },
): NonlinearityTest | Insufficient {
  const { random, segmentLength = 64, surrogates = 39, iterations = 10 } = options
  if (!Number.isInteger(surrogates) || surrogates < 9) throw new RangeError(`surrogates must be an integer of at least 9, got ${surrogates}`)
  const segments = Math.floor(x.length / segmentLength)
  if (segments < FEWEST_SEGMENTS) return insufficient(`${segments} segments of ${segmentLength} samples, at least ${FEWEST_SEGMENTS} are needed`)
  const own = unevenness(x, segmentLength)
  if (!(own >= 0)) return insufficient('the record has no power at some frequencies')
  const theirs = new Float64Array(surrogates)
  let rank = 0
  let sum = 0
  for (let i = 0; i < surrogates; i++) {
    theirs[i] = unevenness(surrogate(x, random, iterations), segmentLength)
    if (theirs[i] < own) rank++
    sum += theirs[i]
  }
  const surrogateMean = sum / surrogates
  let squares = 0
  for (const v of theirs) squares += (v - surrogateMean) ** 2
  const surrogateSd = Math.sqrt(squares / (surrogates - 1))
  return {
    status: 'ok',
    pValue: (1 + surrogates - rank) / (1 + surrogates),
    rank,
    surrogates,
    effect: (own - surrogateMean) / surrogateSd,
    unevenness: own,
    surrogateMean,
    surrogateSd,
    segments,
  }
}

function unevenness(x: Float64Array, segmentLength: number): number {
  const { squared, meanSquared } = bicoherence(x, { segmentLength })
  let squares = 0
  for (const v of squared) squares += (v - meanSquared) ** 2
  return Math.sqrt(squares / squared.length) / meanSquared
}
