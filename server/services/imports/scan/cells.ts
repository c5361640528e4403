/** What a cell that is no plain number turned out to be. */
export type CellKind = 'number' | 'empty' | 'nan' | 'text' | 'garbled'

const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/

export interface Cell { kind: CellKind, value: number, reason: string }
const cell: Cell = { kind: 'empty', value: NaN, reason: '' }

/**
 * Reads the text of a value cell. A word in place of a value (`Bad`, `No Data`, `-`) is a missing value of the kind
 * `text`; something that starts like a number but is none (`12.3.4`, `5 kg`) is `garbled` and is rejected, because
 * nobody can say what was meant. The answer is one object, used again by the next call.
 */
export function readCell(text: string, decimal: '.' | ','): Cell {
  text = text.trim()
  cell.value = NaN
  cell.reason = ''
  if (text === '') { cell.kind = 'empty' }
  else if (NUMBER.test(decimal === ',' ? text.replace(',', '.') : text) && !(decimal === ',' && text.includes('.'))) {
    cell.value = Number(decimal === ',' ? text.replace(',', '.') : text)
    cell.kind = 'number'
    if (!Number.isFinite(cell.value)) {
      cell.kind = 'garbled'
      cell.value = NaN
      cell.reason = 'number is too large'
    }
  }
  else if (/^[+-]?nan$/i.test(text)) { cell.kind = 'nan' }
  else if (/^[+-]?[.,]?\d/.test(text)) {
    cell.kind = 'garbled'
    cell.reason = 'not a number'
  }
  else { cell.kind = 'text' }
  return cell
}

export const MODE_WORDS_MISSING = /^(bad|no ?data|null|n\/?a|#n\/?a|nan|none|error|invalid|unknown|questionable|off ?line|not connected|(i\/o )?time ?out|comm(unication)? ?(fail(ure)?|error)?|-+|\?+)$/i

const SYNONYMS: Record<string, string> = { A: 'AUTO', AUT: 'AUTO', AUTOMATIC: 'AUTO', M: 'MAN', MANUAL: 'MAN', HAND: 'MAN', C: 'CAS', CASC: 'CAS', CASCADE: 'CAS' }

/** A mode as one upper-case word; the usual spellings of automatic, manual and cascade become AUTO, MAN, CAS. '' when missing. */
export function normaliseMode(text: string): string {
  const word = text.trim().toUpperCase().slice(0, 40)
  if (word === '' || MODE_WORDS_MISSING.test(word)) return ''
  return SYNONYMS[word] ?? word
}

export type Quality = 'good' | 'uncertain' | 'bad' | 'unknown'

/** Quality by word or by OPC number: bits 7-6 of the OPC DA quality byte; a number of 32 bits is an OPC UA status code (bits 31-30). */
export function readQuality(text: string): Quality {
  const word = text.trim().toLowerCase()
  if (word === '') return 'good'
  if (/^\d+$/.test(word)) {
    const n = Number(word)
    if (n > 0xffff) return n > 0xffffffff ? 'unknown' : n < 0x40000000 ? 'good' : n < 0x80000000 ? 'uncertain' : 'bad'
    return (['bad', 'uncertain', 'bad', 'good'] as const)[(n >> 6) & 3]
  }
  if (/^(good|ok|g|valid|normal)\b/.test(word)) return 'good'
  if (/^(uncertain|questionable|suspect|doubtful|u|q)\b/.test(word)) return 'uncertain'
  if (/^(bad|b|invalid|error|fail|no ?data|comm|not |off|timeout|i\/o)/.test(word)) return 'bad'
  return 'unknown'
}
