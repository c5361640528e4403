import { bootstrapBlockLength } from '../statistics/bootstrapBlockLength'
import { seededRandom, type SeededRandom } from '../statistics/seededRandom'
import { stationaryBootstrap } from '../statistics/stationaryBootstrap'

/** One loop over one stretch of time, averaged into bins; only time in a normal mode counts for the error. */
export interface ProofRecord {
  /** mean of abs(SP - PV) per bin, PV unit; NaN: nothing usable in normal mode */
  absolute: Float64Array
  /** mean of SP - PV per bin */
  error: Float64Array
  /** mean of (SP - PV)^2 per bin */
  square: Float64Array
  binS: number
  /** 1 lost, 0 not lost, NaN no data or declared outage; hour by hour */
  lostHours: Float64Array
  /** means over normal-mode time, NaN when unknown */
  setpointMean: number
  outputMean: number
}

export interface Estimate { value: number, low: number, high: number }
export interface Check { name: string, ok: boolean, text: string }
export interface Comparison {
  verdict: 'better' | 'noChange' | 'worse' | 'cannotTell'
  reason: string
  iaeRatio: Estimate | null
  varianceRatio: Estimate | null
  lostHoursWonPerWeek: Estimate | null
  checks: Check[]
  samplesBefore: number
  samplesAfter: number
  blockLength: number | null
}

const REPLICATES = 999
/** Ours: a set point or load that differs by more than this is another operation, not a better loop. */
const SETPOINT_LIMIT = 0.10
const OUTPUT_LIMIT = 0.20

const finite = (x: Float64Array) => x.filter(v => v === v)
const mean = (x: Float64Array) => { let s = 0; for (const v of x) s += v; return s / x.length }

/**
 * Before and after a repair: ratios of IAE per hour and of error variance, and lost hours won a week, each with a
 * percentile interval (95 % unless `level` says otherwise) from the stationary bootstrap of both windows, and what they say together.
 *
 * Better (worse): at least one of IAE and lost hours says so beyond chance and the other does not say the opposite.
 * Windows that are too short, or whose set point or load differ, give `cannotTell` with the reason.
 *
 * @param before,after records in the same bins
 * @param pvSpan,opSpan instrument and output span, above 0
 * @param settlingS settling horizon of the loop, s
 * @param seed of the bootstrap, kept with the answer
 * @param level of the intervals, 0.5..0.998; above 0.95 where several looks share one error rate
 * @throws RangeError on spans that are not above 0 or bins of different length
 * Source: Politis, Romano (1994) for the bootstrap; Politis, White (2004) for the block length; the decision and the
 * limits of comparability are our own.
 */
export function compareWindows(before: ProofRecord, after: ProofRecord, { pvSpan, opSpan, settlingS, seed, level = 0.95 }: { pvSpan: number, opSpan: number, settlingS: number, seed: number, level?: number }): Comparison {
  if (!(level >= 0.5 && level <= 0.998)) throw new RangeError(`compareWindows: the level must be 0.5 to 0.998 with ${REPLICATES} replicates, not ${level}`)
  if (!(pvSpan > 0) || !(opSpan > 0)) throw new RangeError(`compareWindows: spans must be above 0, not ${pvSpan} and ${opSpan}`)
  if (before.binS !== after.binS) throw new RangeError(`compareWindows: bins of ${before.binS} s against ${after.binS} s`)
  const random = seededRandom(seed)
  const bins = [usable(before), usable(after)] as const
  const needed = Math.min(24, Math.max(2, 50 * settlingS / 3600))
  const hours = bins.map(b => b.absolute.length * before.binS / 3600)
  const checks: Check[] = [
    { name: 'time before', ok: hours[0] >= needed, text: `${hours[0].toFixed(0)} h in a normal mode before (${needed.toFixed(0)} h needed)` },
    { name: 'time after', ok: hours[1] >= needed, text: `${hours[1].toFixed(0)} h in a normal mode after (${needed.toFixed(0)} h needed)` },
  ]
  const enough = checks.every(c => c.ok)
  checks.push(comparable('set point', before.setpointMean, after.setpointMean, pvSpan, SETPOINT_LIMIT), comparable('load (mean output)', before.outputMean, after.outputMean, opSpan, OUTPUT_LIMIT))
  const comparableConditions = checks.slice(2).every(c => c.ok)

  const length = enough ? Math.max(...bins.map(b => bootstrapBlockLength(b.absolute))) : null
  const { iaeRatio, varianceRatio } = length ? ratios(bins[0], bins[1], length, random, level) : { iaeRatio: null, varianceRatio: null }
  const lost = [finite(before.lostHours), finite(after.lostHours)]
  const lostHoursWonPerWeek = lost.every(l => l.length >= 24) ? difference(lost[0], lost[1], random, level) : null

  const base = { iaeRatio, varianceRatio, lostHoursWonPerWeek, checks, samplesBefore: bins[0].absolute.length, samplesAfter: bins[1].absolute.length, blockLength: length }
  if (!iaeRatio && !lostHoursWonPerWeek) return { ...base, verdict: 'cannotTell', reason: checks.filter(c => !c.ok).map(c => c.text).join('; ') + '.' }
  if (enough && !comparableConditions) return { ...base, verdict: 'cannotTell', reason: `The conditions differ: ${checks.filter(c => !c.ok).map(c => c.text).join('; ')}.` }
  const says = [iaeRatio ? direction(iaeRatio.high < 1, iaeRatio.low > 1) : 0, lostHoursWonPerWeek ? direction(lostHoursWonPerWeek.low > 0, lostHoursWonPerWeek.high < 0) : 0]
  if (says.includes(1) && says.includes(-1)) return { ...base, verdict: 'noChange', reason: 'Error and lost hours say opposite things, so neither better nor worse is proven.' }
  if (says.includes(1)) return { ...base, verdict: 'better', reason: sentence(base, 'better') }
  if (says.includes(-1)) return { ...base, verdict: 'worse', reason: sentence(base, 'worse') }
  return { ...base, verdict: 'noChange', reason: 'No difference beyond chance.' }
}

interface Usable { absolute: Float64Array, error: Float64Array, square: Float64Array }

function usable(record: ProofRecord): Usable {
  const keep = (x: Float64Array) => x.filter((_, k) => record.absolute[k] === record.absolute[k])
  return { absolute: keep(record.absolute), error: keep(record.error), square: keep(record.square) }
}

function comparable(name: string, a: number, b: number, span: number, limit: number): Check {
  if (!Number.isFinite(a) || !Number.isFinite(b)) return { name, ok: true, text: `${name} not recorded, so not compared` }
  const share = Math.abs(a - b) / span
  return { name, ok: share <= limit, text: `${name} differs by ${(share * 100).toFixed(1)} % of span (up to ${limit * 100} % is comparable)` }
}

interface Figures { iae: number, variance: number }

/** Mean of abs(e) and variance of e over the bins named by `index`, or over all. */
function figures(u: Usable, index?: Int32Array): Figures {
  let absolute = 0
  let error = 0
  let square = 0
  const n = u.absolute.length
  for (let i = 0; i < n; i++) {
    const k = index ? index[i] : i
    absolute += u.absolute[k]
    error += u.error[k]
    square += u.square[k]
  }
  return { iae: absolute / n, variance: square / n - (error / n) ** 2 }
}

function ratios(before: Usable, after: Usable, blockLength: number, random: SeededRandom, level: number): { iaeRatio: Estimate | null, varianceRatio: Estimate | null } {
  const seen = [figures(before), figures(after)]
  const iae = new Float64Array(REPLICATES)
  const variance = new Float64Array(REPLICATES)
  const index = [before, after].map(u => new Int32Array(u.absolute.length))
  for (let r = 0; r < REPLICATES; r++) {
    const [b, a] = [before, after].map((u, k) => figures(u, stationaryBootstrap(u.absolute.length, Math.min(blockLength, u.absolute.length), random, index[k])))
    iae[r] = a.iae / b.iae
    variance[r] = a.variance / b.variance
  }
  const of = (figure: keyof Figures, replicates: Float64Array) => (seen[0][figure] > 0 ? interval(seen[1][figure] / seen[0][figure], replicates, level) : null)
  return { iaeRatio: of('iae', iae), varianceRatio: of('variance', variance) }
}

/** Hours won a week: (share lost before - share lost after) x 168. */
function difference(before: Float64Array, after: Float64Array, random: SeededRandom, level: number): Estimate {
  const value = (mean(before) - mean(after)) * 168
  // hours hang together over a shift; the rule of the block length needs a series that varies
  const block = (x: Float64Array) => Math.min(x.length / 3, Math.max(3, bootstrapBlockLength(x)))
  const lengths = [block(before), block(after)]
  const replicates = new Float64Array(REPLICATES)
  const resampledMean = (x: Float64Array, length: number) => { let s = 0; for (const k of stationaryBootstrap(x.length, length, random)) s += x[k]; return s / x.length }
  for (let r = 0; r < REPLICATES; r++) replicates[r] = (resampledMean(before, lengths[0]) - resampledMean(after, lengths[1])) * 168
  return interval(value, replicates, level)
}

function interval(value: number, replicates: Float64Array, level: number): Estimate {
  const tail = (1 - level) / 2
  const sorted = replicates.slice().sort()
  return { value, low: sorted[Math.max(1, Math.floor(tail * (REPLICATES + 1) + 1e-9)) - 1], high: sorted[Math.min(REPLICATES, Math.ceil((1 - tail) * (REPLICATES + 1) - 1e-9)) - 1] }
}

const direction = (better: boolean, worse: boolean) => (better ? 1 : worse ? -1 : 0)

function sentence({ iaeRatio, lostHoursWonPerWeek }: { iaeRatio: Estimate | null, lostHoursWonPerWeek: Estimate | null }, verdict: 'better' | 'worse'): string {
  const parts: string[] = []
  if (iaeRatio) parts.push(`the mean error is ${(iaeRatio.value * 100).toFixed(0)} % of what it was (${(iaeRatio.low * 100).toFixed(0)} to ${(iaeRatio.high * 100).toFixed(0)} %)`)
  if (lostHoursWonPerWeek && Math.abs(lostHoursWonPerWeek.value) >= 0.5) parts.push(`${Math.abs(lostHoursWonPerWeek.value).toFixed(0)} lost hours a week ${lostHoursWonPerWeek.value > 0 ? 'fewer' : 'more'}`)
  return `${verdict === 'better' ? 'Better' : 'Worse'}: ${parts.join(', ')}.`
}
