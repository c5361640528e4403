export type SignalName = 'pv' | 'sp' | 'op' | 'mode'
export interface LoopSignal { tag: string, signal: SignalName }

/** Words in use for the four signals of a loop (common practice, no source). Compared without case, blanks, `_` and `-`. */
const ALIASES: Record<SignalName, string[]> = {
  pv: ['PV', 'MEAS', 'MEASUREMENT', 'MEASURED', 'PROCESSVALUE', 'PROCESSVARIABLE', 'MEASUREDVALUE', 'ACTUAL', 'ACT', 'ACTUALVALUE'],
  sp: ['SP', 'SV', 'SETPOINT', 'SETPT', 'SPT', 'SETVALUE', 'SPV', 'WSP', 'REFERENCE', 'TARGET'],
  op: ['OP', 'OUT', 'OUTPUT', 'CO', 'MV', 'CONTROLLEROUTPUT', 'CONTROLOUTPUT', 'MANIPULATEDVARIABLE', 'OPOUT'],
  mode: ['MODE', 'MD', 'MOD', 'CONTROLMODE', 'ACTUALMODE', 'MODEACT', 'MODEACTUAL', 'LOOPMODE'],
}
const SIGNALS = new Map(Object.entries(ALIASES).flatMap(([signal, words]) => words.map(word => [word, signal as SignalName] as const)))

const bare = (word: string) => word.replace(/[\s_-]/g, '').toUpperCase()
export const signalOf = (word: string): SignalName | null => SIGNALS.get(bare(word)) ?? null

/**
 * `TIC-1204.PV` to its loop and signal. The mark between may be . / : _ or a blank; tags may hold these marks too, so
 * the shortest known word at the end is the signal. A unit in brackets behind it is left out. Null: not a loop's signal.
 */
export function splitSignalName(name: string): LoopSignal | null {
  const text = name.trim().replace(/\s*[([][^()[\]]*[)\]]\s*$/, '').trim()
  for (let at = text.length - 1; at > 0; at--) {
    if (!'./:_ '.includes(text[at])) continue
    const signal = signalOf(text.slice(at + 1))
    const tag = text.slice(0, at).trim().replace(/[./:_]+$/, '').trim()
    if (signal && tag) return { tag, signal }
  }
  return null
}

const TIME = /^(utc |local )?(time ?stamp|date ?[/_-]? ?time|time|date|zeit|zeitstempel|datum|ts|t|epoch|when)( ?[([].*[)\]])?( ?utc)?$/i
const TAG = /^(tag|tag ?name|name|point|point ?name|signal|item|variable|id|tag ?id|series)$/i
const VALUE = /^(value|val|data|reading|wert)( ?[([].*[)\]])?$/i
const QUALITY = /^(quality|qual|q|status|state|opc ?quality|quality ?code)$/i
const words = (header: string) => header.trim().replace(/_/g, ' ')
export const isTimeHeader = (header: string) => TIME.test(words(header))
export const isTagHeader = (header: string) => TAG.test(words(header))
export const isValueHeader = (header: string) => VALUE.test(words(header))
export const isQualityHeader = (header: string) => QUALITY.test(words(header))
