import { parse } from 'csv-parse/sync'

const QUOTE = 34
const NEWLINE = 10
/** A quoted cell longer than this is taken for a quote that nobody closed. */
export const LONGEST_RECORD = 256 * 1024

/**
 * Offset behind the record that begins at `from`, newlines within quotes included; -1 when it does not end before `to`.
 * A quote opens only at the start of a cell, as in RFC 4180; `5"` in the middle of a cell is text.
 */
export function recordEnd(bytes: Uint8Array, from: number, to: number, delimiter: number): number {
  let quoted = false
  let start = true
  for (let p = from; p < to; p++) {
    const c = bytes[p]
    if (quoted) {
      if (c === QUOTE) {
        if (bytes[p + 1] === QUOTE && p + 1 < to) p++
        else quoted = false
      }
    }
    else if (c === QUOTE && start) { quoted = true }
    else if (c === NEWLINE) { return p + 1 }
    start = !quoted && c === delimiter
  }
  return -1
}

/** The cells of one record, by the library: only for records that hold quotes the scanner cannot take in its stride. */
export function readRecord(text: string, delimiter: string): string[] {
  try {
    return (parse(text, { delimiter, relax_quotes: true, relax_column_count: true, bom: false }) as string[][])[0] ?? []
  }
  catch {
    return [text]
  }
}
