import { MODE_UNKNOWN } from '../../../../db/blocks/types'
import { readCell } from './cells'
import { LastCell, type ModeNames } from './modeNames'
import { LONGEST_RECORD, readRecord, recordEnd } from './records'
import type { ScanLog } from './scanLog'
import type { TimeReader } from './timeReader'
import type { WideSink } from './wideSink'

export interface WidePlan {
  delimiter: string
  decimal: '.' | ','
  timeColumn: number
  /** header text of each column, for the rejects */
  headers: string[]
  /** per column: value column of the sink (0..), IGNORE, or -2 - mode column */
  targets: Int32Array
  decode: (bytes: Uint8Array) => string
}
export const IGNORE = -1

const POWERS = Array.from({ length: 16 }, (_, d) => 10 ** d)
const NEWLINE = 10
const RETURN = 13
const QUOTE = 34

/**
 * Reads the data lines of a wide file from bytes straight into columns. A plain number of up to 15 digits is read here
 * (its digits are exact in a double and one correctly rounded division follows, so it equals `Number()`); any other
 * cell is read as text, and a record with doubled quotes or newlines in quotes goes through csv-parse.
 */
export class WideScanner {
  line: number
  private before = NaN
  private readonly lastModes: LastCell[]

  constructor(private readonly plan: WidePlan, private readonly sink: WideSink, private readonly times: TimeReader, private readonly modes: ModeNames, private readonly log: ScanLog, firstLine: number) {
    this.line = firstLine
    this.lastModes = Array.from({ length: sink.modeColumns }, () => new LastCell())
  }

  /**
   * Reads whole records of bytes[from..to); the last byte is a newline.
   * @param last no more bytes follow
   * @returns the offset of the first record that is not complete yet
   */
  scan(bytes: Uint8Array, from: number, to: number, last: boolean): number {
    const { plan, sink, log, times } = this
    const { targets, timeColumn } = plan
    const columns = targets.length
    const delimiter = plan.delimiter.charCodeAt(0)
    const decimal = plan.decimal.charCodeAt(0)
    const { values, modes, capacity } = sink
    const missing = log.missing
    let start = from

    lines: while (start < to) {
      const first = bytes[start]
      if (first === NEWLINE || (first === RETURN && bytes[start + 1] === NEWLINE)) {
        start += first === NEWLINE ? 1 : 2
        this.line++
        continue
      }
      const row = sink.rows
      let p = start
      let column = 0
      let t = NaN
      let timeFrom = 0
      let timeTo = 0
      let samples = 0
      let empty = 0
      let nan = 0
      let text = 0
      const rejectsBefore = log.rejects.length
      const rejectedBefore = log.rejected

      for (;;) {
        const target = column < columns ? targets[column] : IGNORE
        if (target >= 0) {
          // the plain number
          let q = p
          let c = bytes[q]
          const negative = c === 45
          if (negative || c === 43) c = bytes[++q]
          const digitsFrom = q
          let mantissa = 0
          let d = c - 48
          while (d >= 0 && d <= 9) {
            mantissa = mantissa * 10 + d
            d = bytes[++q] - 48
          }
          let digits = q - digitsFrom
          let fraction = 0
          if (bytes[q] === decimal) {
            const at = ++q
            d = bytes[q] - 48
            while (d >= 0 && d <= 9) {
              mantissa = mantissa * 10 + d
              d = bytes[++q] - 48
            }
            fraction = q - at
            digits += fraction
          }
          c = bytes[q]
          if (digits > 0 && digits <= 15 && (c === delimiter || c === NEWLINE || (c === RETURN && bytes[q + 1] === NEWLINE))) {
            const value = fraction === 0 ? mantissa : mantissa / POWERS[fraction]
            values[target * capacity + row] = negative ? -value : value
            samples++
            p = q
          }
          else {
            let cellFrom = p
            let cellTo: number
            if (bytes[p] === QUOTE) {
              cellTo = this.quotedEnd(bytes, p, to, delimiter)
              if (cellTo < 0) {
                start = this.oddRecord(bytes, start, to, last, rejectsBefore, rejectedBefore)
                if (start < 0) return -start - 1
                continue lines
              }
              cellFrom = p + 1
              p = cellTo + 1
            }
            else {
              while (bytes[p] !== delimiter && bytes[p] !== NEWLINE) p++
              cellTo = bytes[p] === NEWLINE && bytes[p - 1] === RETURN && p > cellFrom ? p - 1 : p
            }
            const raw = cellFrom === cellTo ? '' : plan.decode(bytes.subarray(cellFrom, cellTo))
            const cell = readCell(raw, plan.decimal)
            values[target * capacity + row] = cell.value
            if (cell.kind === 'number') samples++
            else if (cell.kind === 'empty') empty++
            else if (cell.kind === 'nan') nan++
            else if (cell.kind === 'text') text++
            else log.reject(this.line, plan.headers[column], raw, cell.reason)
          }
        }
        else {
          let cellFrom = p
          let cellTo: number
          if (bytes[p] === QUOTE) {
            cellTo = this.quotedEnd(bytes, p, to, delimiter)
            if (cellTo < 0) {
              start = this.oddRecord(bytes, start, to, last, rejectsBefore, rejectedBefore)
              if (start < 0) return -start - 1
              continue lines
            }
            cellFrom = p + 1
            p = cellTo + 1
          }
          else {
            let c = bytes[p]
            while (c !== delimiter && c !== NEWLINE) c = bytes[++p]
            cellTo = c === NEWLINE && p > cellFrom && bytes[p - 1] === RETURN ? p - 1 : p
          }
          if (column === timeColumn) {
            timeFrom = cellFrom
            timeTo = cellTo
          }
          else if (target < IGNORE) {
            const k = -2 - target
            const lastMode = this.lastModes[k]
            if (!lastMode.same(bytes, cellFrom, cellTo)) lastMode.keep(bytes, cellFrom, cellTo, this.modes.codeOf(plan.decode(bytes.subarray(cellFrom, cellTo))))
            const code = lastMode.code
            modes[k * capacity + row] = code
            if (code !== MODE_UNKNOWN) samples++
            else if (cellFrom === cellTo) empty++
            else text++
          }
          else if (column >= columns && cellTo > cellFrom) {
            // more cells than columns: nothing in this line can be trusted to stand where it should
            column = 1e9
            while (bytes[p] !== NEWLINE) p++
          }
        }
        const c = bytes[p]
        if (c === delimiter) {
          p++
          column++
          continue
        }
        if (c === RETURN) p++
        p++
        break
      }

      log.rows++
      if (column === columns - 1 || (column >= columns && column < 1e9)) {
        while (timeFrom < timeTo && bytes[timeFrom] === 32) timeFrom++
        while (timeTo > timeFrom && bytes[timeTo - 1] === 32) timeTo--
        t = times.read(bytes, timeFrom, timeTo, this.before)
        if (t === t) {
          this.before = t
          log.samples += samples
          missing.empty += empty
          missing.nan += nan
          missing.text += text
          sink.commit(t)
        }
        else {
          this.forget(rejectsBefore, rejectedBefore)
          log.reject(this.line, plan.headers[timeColumn], plan.decode(bytes.subarray(timeFrom, timeTo)), times.reason)
        }
      }
      else {
        this.forget(rejectsBefore, rejectedBefore)
        this.rejectLine(bytes, start, p)
      }
      this.line++
      start = p
    }
    return start
  }

  /** Offset of the closing quote of a cell that holds neither quotes nor newlines, else -1. */
  private quotedEnd(bytes: Uint8Array, p: number, to: number, delimiter: number): number {
    let q = p + 1
    while (q < to && bytes[q] !== QUOTE && bytes[q] !== NEWLINE) q++
    const after = bytes[q + 1]
    return q < to && bytes[q] === QUOTE && (after === delimiter || after === NEWLINE || (after === RETURN && bytes[q + 2] === NEWLINE)) ? q : -1
  }

  /** A row that is rejected as a whole counts once, not once more for each of its cells. */
  private forget(rejects: number, rejected: number): void {
    this.log.rejects.length = rejects
    this.log.rejected = rejected
  }

  private rejectLine(bytes: Uint8Array, from: number, to: number): void {
    const text = this.plan.decode(bytes.subarray(from, Math.min(to, from + 300))).replace(/[\r\n]+$/, '')
    this.log.reject(this.line, '', text, `the header has ${this.plan.targets.length} columns, this line has not`)
  }

  /** A record for the library. @returns the offset behind it, or -(start + 1) when it is not complete yet. */
  private oddRecord(bytes: Uint8Array, start: number, to: number, last: boolean, rejects: number, rejected: number): number {
    const { plan, sink, log } = this
    this.forget(rejects, rejected)
    let end = recordEnd(bytes, start, to, plan.delimiter.charCodeAt(0))
    if (end < 0 && !last && to - start < LONGEST_RECORD) return -(start + 1)
    if (end < 0 || end - start > LONGEST_RECORD) {
      end = start
      while (bytes[end] !== NEWLINE) end++
      end++
      log.rows++
      log.reject(this.line++, '', plan.decode(bytes.subarray(start, Math.min(end, start + 300))).trimEnd(), 'a quote is opened and never closed')
      return end
    }
    let newlines = 0
    for (let p = start; p < end; p++) if (bytes[p] === NEWLINE) newlines++
    const cells = readRecord(plan.decode(bytes.subarray(start, end)).replace(/\r?\n$/, ''), plan.delimiter)
    log.rows++
    const time = Buffer.from((cells[plan.timeColumn] ?? '').trim())
    if (cells.length < plan.targets.length || cells.slice(plan.targets.length).some(extra => extra !== '')) { this.rejectLine(bytes, start, end) }
    else {
      const t = this.times.read(time, 0, time.length, this.before)
      if (t !== t) { log.reject(this.line, plan.headers[plan.timeColumn], time.toString(), this.times.reason) }
      else {
        for (let column = 0; column < plan.targets.length; column++) {
          const target = plan.targets[column]
          if (target >= 0) {
            const cell = readCell(cells[column], plan.decimal)
            sink.values[target * sink.capacity + sink.rows] = cell.value
            if (cell.kind === 'number') log.samples++
            else if (cell.kind === 'garbled') log.reject(this.line, plan.headers[column], cells[column], cell.reason)
            else log.missing[cell.kind]++
          }
          else if (target < IGNORE) {
            const code = this.modes.codeOf(cells[column])
            sink.modes[(-2 - target) * sink.capacity + sink.rows] = code
            if (code !== MODE_UNKNOWN) log.samples++
            else log.missing[cells[column] === '' ? 'empty' : 'text']++
          }
        }
        this.before = t
        sink.commit(t)
      }
    }
    this.line += newlines
    return end
  }
}
