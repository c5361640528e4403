import { compressionFactor } from '../quality/compressionFactor'
import { quantisationStep, type QuantisationStep } from '../quality/quantisationStep'
import { AT_HIGH, AT_LOW, FROZEN, OFF_NORMAL, type PreparedRecord } from '../preparation/prepareRecord'
import { isInsufficient } from '../types'
import type { Explainer } from './Explainer'
import { sentence } from './sentence'

const QUALITY_SAMPLES = 8000
const COMPRESSION_LIMIT = 3

/** A piece of at most QUALITY_SAMPLES from the middle: resolution and compression do not change within a week. */
export function middleOf(x: Float64Array): Float64Array {
  const from = Math.max(0, (x.length - QUALITY_SAMPLES) >> 1)
  return x.subarray(from, from + QUALITY_SAMPLES)
}

/**
 * Resolution and compression. Frozen stretches do not count, or a dead sensor would look like a thinned record. Where rounding hides PV's
 * compression, OP's is looked at, in a normal mode and off its limits: a dead sensor makes the
 * output a ramp, which looks thinned.
 * @returns why shape, benchmark and valve tests cannot be trusted on this record, or null
 */
export function explainQuality(explain: Explainer, prepared: PreparedRecord, step: QuantisationStep): string | null {
  const piece = masked(prepared, prepared.pv, FROZEN)
  if (step.step > 0) explain.set('quantisation', step.step, piece.length, {}, { stepOverDeviation: step.factor })
  else explain.withhold('quantisation', 'No step can be seen: the values do not lie on a grid.')
  const c = piece.length > 0 ? compressionFactor(piece, step.step) : null
  if (!c || isInsufficient(c)) {
    explain.withhold('compressionFactor', c ? sentence(c.reason) : 'No samples in this week.')
    return prepared.op && prepared.n > 1 ? outputThinned(masked(prepared, prepared.op, FROZEN | OFF_NORMAL | AT_LOW | AT_HIGH)) : null
  }
  explain.set('compressionFactor', c.factor, c.samples, { tolerance: c.tolerance, upperLimit: COMPRESSION_LIMIT }, { zeroSecondDifferences: c.zeroSecondDifferences, repeats: c.repeats, repeatFactor: c.repeatFactor })
  if (c.factor > COMPRESSION_LIMIT) return `The historian has thinned the record (compression factor ${c.factor.toFixed(1)}, limit 3), so its shape cannot be trusted.`
  // repeats come from coarse resolution too: only a fine step tells that a value was held
  if (c.repeatFactor > COMPRESSION_LIMIT && step.step > 0 && step.factor < 0.1) return `Most samples repeat the one before (factor ${c.repeatFactor.toFixed(1)}, limit 3): the historian holds old values, so the shape cannot be trusted.`
  return null
}

function outputThinned(op: Float64Array): string | null {
  const c = compressionFactor(op, quantisationStep(op).step)
  return !isInsufficient(c) && c.factor > COMPRESSION_LIMIT ? `The historian has thinned the output's record (compression factor ${c.factor.toFixed(1)}, limit 3), so its shape cannot be trusted.` : null
}

/** The middle of a signal with the marked samples left out. */
function masked({ flags }: PreparedRecord, x: Float64Array, drop: number): Float64Array {
  const from = Math.max(0, (x.length - QUALITY_SAMPLES) >> 1)
  return x.slice(from, from + QUALITY_SAMPLES).map((v, i) => (flags[from + i] & drop) !== 0 ? NaN : v)
}
