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
 * A range for a loop whose range nobody has said: from 0 to a round limit above the data, to both sides where they are
 * negative. Instruments are bought with ranges that begin at 0 and are many times what a week moves (common practice,
 * no source); a range laid close around a quiet week would make a tolerance in per cent of it smaller than the noise.
 * Marked as guessed, because measures in per cent of span hang on it.
 */
export function guessRange(min: number, max: number): { low: number, high: number } {
  const limit = (size: number) => Number(nice(Math.max(size * 1.1, Number.MIN_VALUE * 1e20)).toPrecision(12))
  if (min >= 0) return { low: 0, high: max > 0 ? limit(max) : 1 }
  if (max <= 0) return { low: -limit(-min), high: 0 }
  const both = limit(Math.max(max, -min))
  return { low: -both, high: both }
}

/** Output limits: per cent, unless the data can only be a fraction or leave that range. */
export function guessOutputRange(min: number, max: number): { low: number, high: number } {
  if (!(max >= min) || (min >= -5 && max <= 105 && max > 1.05)) return { low: 0, high: 100 }
  if (min >= -0.05 && max <= 1.05) return max > 0 && !Number.isInteger(max) ? { low: 0, high: 1 } : { low: 0, high: max > 1 ? 100 : 1 }
  return guessRange(min, max)
}
