import type { LoopType } from '../../../shared/assessment/types'

const TYPES: Record<string, LoopType> = { F: 'flow', P: 'pressure', L: 'level', T: 'temperature', A: 'analysis' }

/** Loop type from the letters of a tag: the first one is what is measured (ISA-5.1, table of identification letters). */
export function typeOfTag(tag: string): LoopType {
  const letters = /(?:^|[^A-Za-z])([A-Z][A-Z]{0,3}C[A-Z]{0,2})(?![A-Za-z])/.exec(tag.toUpperCase())?.[1] ?? /(?:^|[^A-Za-z])([FPLTA])[A-Z]{0,3}[-_ ]?\d/.exec(tag.toUpperCase())?.[1]
  return TYPES[letters?.[0] ?? ''] ?? 'other'
}

const nice = (span: number): number => {
  const power = 10 ** Math.floor(Math.log10(span))
  return [1, 2, 2.5, 5, 10].find(m => m * power >= span * 0.999999)! * power
}

/**
 * A range for a loop whose range nobody has said: round limits that hold the data with a tenth to spare, from 0 where
 * the data are positive and reach well down. Marked as guessed, because measures in per cent of span hang on it.
 */
export function guessRange(min: number, max: number): { low: number, high: number } {
  if (!(max > min)) {
    const size = Math.max(1, Math.abs(min))
    return { low: min >= 0 ? 0 : -nice(size * 2), high: min >= 0 ? nice(size * 2) : 0 }
  }
  const margin = (max - min) * 0.1
  if (min >= 0 && min - margin < max * 0.5) return { low: 0, high: nice(max + margin) }
  const step = nice((max - min) / 5)
  const low = Math.floor((min - margin) / step) * step
  return { low: Number(low.toPrecision(12)), high: Number((Math.ceil((max + margin) / step) * step).toPrecision(12)) }
}

/** Output limits: per cent, unless the data can only be a fraction or leave that range. */
export function guessOutputRange(min: number, max: number): { low: number, high: number } {
  if (!(max >= min) || (min >= -5 && max <= 105 && max > 1.05)) return { low: 0, high: 100 }
  if (min >= -0.05 && max <= 1.05) return max > 0 && !Number.isInteger(max) ? { low: 0, high: 1 } : { low: 0, high: max > 1 ? 100 : 1 }
  return guessRange(min, max)
}
