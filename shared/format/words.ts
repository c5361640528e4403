/** Small words for sentences that are built from figures. */
import type { LoopType, Verdict } from '../assessment/types'
import { formatCount } from './number'

const small = ['No', 'One', 'Two', 'Three', 'Four', 'Five', 'Six', 'Seven', 'Eight', 'Nine', 'Ten', 'Eleven', 'Twelve']

/** `1 loop`, `14 loops` */
export const counted = (n: number, one: string, many = `${one}s`): string => `${formatCount(n)} ${n === 1 ? one : many}`

/** A count that opens a sentence: words up to twelve, figures above. */
export const opening = (n: number): string => small[n] ?? formatCount(n)

/** `a`, `a and b`, `a, b and c` */
export function listed(words: string[]): string {
  return words.length < 2 ? words.join('') : `${words.slice(0, -1).join(', ')} and ${words[words.length - 1]}`
}

export const VERDICT_WORDS: Readonly<Record<Verdict, string>> = {
  steady: 'steady',
  huntingTuning: 'hunting: tuning too tight',
  huntingValve: 'hunting: sticking valve',
  huntingExternal: 'hunting: carried in',
  sluggish: 'sluggish',
  saturated: 'runs against a limit',
  manual: 'left in manual',
  sensor: 'sensor doubtful',
  noise: 'mostly noise',
  cannotTell: 'cannot tell',
}

/** The verdict as a table says it; an on-off loop has no tuning that could be too tight, but a band. */
export const verdictWords = (verdict: Verdict, form?: string): string => (form === 'onOff' && verdict === 'huntingTuning' ? 'hunting: on-off cycle too wide' : VERDICT_WORDS[verdict])

export const TYPE_WORDS: Readonly<Record<LoopType, string>> = {
  flow: 'flow', pressure: 'pressure', level: 'level', temperature: 'temperature', analysis: 'analysis', other: 'other',
}
