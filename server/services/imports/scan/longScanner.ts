import { MODE_UNKNOWN } from '../../../../db/blocks/types'
import { readCell, readQuality, type Quality } from './cells'
import type { LongSink } from './longSink'
import { LastCell, type ModeNames } from './modeNames'
import { LONGEST_RECORD, readRecord, recordEnd } from './records'
import type { ScanLog } from './scanLog'
import { SeriesTable } from './seriesTable'
import type { TimeReader } from './timeReader'

export interface LongPlan {
  delimiter: string
  decimal: '.' | ','
  headers: string[]
  timeColumn: number
  tagColumn: number
  valueColumn: number
  /** -1: the file has none */
  qualityColumn: number
  decode: (bytes: Uint8Array) => string
}

/** What a name in the tag column means: a numeric signal, a mode, or nothing that belongs to a loop. */
export type SeriesKind = 'value' | 'mode' | 'ignore'

const POWERS = Array.from({ length: 16 }, (_, d) => 10 ** d)
const QUALITIES: Quality[] = ['good', 'uncertain', 'bad', 'unknown']
const NEWLINE = 10
const RETURN = 13
const QUOTE = 34

/** Reads the lines of a long file (`timestamp, tag, value[, quality]`); the same rules for cells as `WideScanner`. */
export class LongScanner {
  line: number
  readonly kinds: SeriesKind[] = []
  /** lines of series that belong to no loop */
  ignoredRows = 0
  private readonly before: number[] = []
  private readonly table: SeriesTable
  private readonly lastModes: LastCell[] = []
  private readonly lastQuality = new LastCell()
  private readonly from: Int32Array
  private readonly to: Int32Array
  /** the columns stand as usual, so that `plainLine` may try */
  private readonly usual: boolean
  private readonly decimal: number

  /** @param seriesOf called once for each new name in the tag column */
  constructor(private readonly plan: LongPlan, private readonly sink: LongSink, private readonly times: TimeReader, private readonly modes: ModeNames, private readonly log: ScanLog, firstLine: number, seriesOf: (name: string, id: number) => SeriesKind) {
    this.line = firstLine
    this.from = new Int32Array(plan.headers.length)
    this.to = new Int32Array(plan.headers.length)
    this.decimal = plan.decimal.charCodeAt(0)
    this.usual = plan.timeColumn === 0 && plan.tagColumn === 1 && plan.valueColumn === 2 && plan.headers.length === (plan.qualityColumn === 3 ? 4 : 3)
    this.table = new SeriesTable((name, id) => {
      this.kinds[id] = seriesOf(plan.decode(name).trim(), id)
      this.before[id] = NaN
      this.lastModes[id] = new LastCell()
    })
  }

  /** As `WideScanner.scan`. */
  scan(bytes: Uint8Array, from: number, to: number, last: boolean): number {
    const { plan, log, sink } = this
    const columns = plan.headers.length
    const delimiter = plan.delimiter.charCodeAt(0)
    const cellFrom = this.from
    const cellTo = this.to
    let start = from
    lines: while (start < to) {
      const first = bytes[start]
      if (first === NEWLINE || (first === RETURN && bytes[start + 1] === NEWLINE)) {
        start += first === NEWLINE ? 1 : 2
        this.line++
        continue
      }
      if (this.usual) {
        const next = this.plainLine(bytes, start, delimiter)
        if (next > 0) {
          log.rows++
          this.line++
          start = next
          continue
        }
      }
      let p = start
      let column = 0
      let extra = false
      for (;;) {
        let a = p
        let b: number
        if (bytes[p] === QUOTE) {
          let q = p + 1
          while (q < to && bytes[q] !== QUOTE && bytes[q] !== NEWLINE) q++
          const after = bytes[q + 1]
          if (!(q < to && bytes[q] === QUOTE && (after === delimiter || after === NEWLINE || (after === RETURN && bytes[q + 2] === NEWLINE)))) {
            start = this.oddRecord(bytes, start, to, last)
            if (start < 0) return -start - 1
            continue lines
          }
          a = p + 1
          b = q
          p = q + 1
        }
        else {
          let c = bytes[p]
          while (c !== delimiter && c !== NEWLINE) c = bytes[++p]
          b = c === NEWLINE && p > a && bytes[p - 1] === RETURN ? p - 1 : p
        }
        if (column < columns) {
          cellFrom[column] = a
          cellTo[column] = b
        }
        else if (b > a) { extra = true }
        if (bytes[p] === delimiter) {
          p++
          column++
          continue
        }
        if (bytes[p] === RETURN) p++
        p++
        break
      }
      log.rows++
      if (column < columns - 1 || extra) log.reject(this.line, '', this.textOf(bytes, start, Math.min(p, start + 300)).trimEnd(), `the header has ${columns} columns, this line has not`)
      else this.take(bytes)
      this.line++
      start = p
    }
    if (sink.rows > sink.capacity) throw new Error('LongSink overran')
    return start
  }

  /**
   * The usual line: a tag that was expected after the one before, a plain number or the mode as before, the quality as
   * before. @returns the offset behind it, or -1 without having changed anything: then `take` has a closer look.
   */
  private plainLine(bytes: Uint8Array, start: number, delimiter: number): number {
    const timeTo = this.times.sameAsLast(bytes, start, delimiter)
    let p = timeTo
    if (p < 0) {
      p = start
      let c = bytes[p]
      while (c !== delimiter && c !== NEWLINE) c = bytes[++p]
      if (c === NEWLINE || bytes[start] === QUOTE || bytes[start] === 32) return -1
    }
    const timeEnd = p++
    const id = this.table.expected(bytes, p, delimiter)
    if (id < 0) return -1
    const kind = this.kinds[id]
    p += this.table.lengthOf(id) + 1
    let value = 0
    if (kind === 'value') {
      const negative = bytes[p] === 45
      if (negative) p++
      const from = p
      let mantissa = 0
      let d = bytes[p] - 48
      while (d >= 0 && d <= 9) {
        mantissa = mantissa * 10 + d
        d = bytes[++p] - 48
      }
      let digits = p - from
      let fraction = 0
      if (bytes[p] === this.decimal) {
        const at = ++p
        d = bytes[p] - 48
        while (d >= 0 && d <= 9) {
          mantissa = mantissa * 10 + d
          d = bytes[++p] - 48
        }
        fraction = p - at
        digits += fraction
      }
      if (digits === 0 || digits > 15) return -1
      value = fraction === 0 ? mantissa : mantissa / POWERS[fraction]
      if (negative) value = -value
    }
    else if (kind === 'mode') {
      const last = this.lastModes[id]
      const length = last.matches(bytes, p)
      if (length <= 0 || last.code === MODE_UNKNOWN) return -1
      value = last.code
      p += length
    }
    else { return -1 }
    if (this.plan.qualityColumn === 3) {
      if (bytes[p] !== delimiter || this.lastQuality.code !== 0) return -1
      const length = this.lastQuality.matches(bytes, ++p)
      if (length <= 0) return -1
      p += length
    }
    if (bytes[p] === RETURN) p++
    if (bytes[p] !== NEWLINE) return -1
    const t = timeTo >= 0 ? this.times.lastUtc : this.times.read(bytes, start, timeEnd, this.before[id])
    if (t !== t) return -1
    this.table.took(id)
    this.before[id] = t
    this.log.samples++
    this.sink.push(t, id, value)
    return p + 1
  }

  private textOf(bytes: Uint8Array, from: number, to: number): string { return this.plan.decode(bytes.subarray(from, to)) }

  /** One line whose cells are at `from` / `to`. */
  private take(bytes: Uint8Array): void {
    const { plan, log, from, to } = this
    let a = from[plan.tagColumn]
    let b = to[plan.tagColumn]
    while (a < b && bytes[a] === 32) a++
    while (b > a && bytes[b - 1] === 32) b--
    if (a === b) {
      log.reject(this.line, plan.headers[plan.tagColumn], '', 'the tag is empty')
      return
    }
    const id = this.table.idOf(bytes, a, b)
    const kind = this.kinds[id]
    if (kind === 'ignore') {
      this.ignoredRows++
      return
    }
    a = from[plan.timeColumn]
    b = to[plan.timeColumn]
    while (a < b && bytes[a] === 32) a++
    while (b > a && bytes[b - 1] === 32) b--
    const t = this.times.read(bytes, a, b, this.before[id])
    if (t !== t) {
      log.reject(this.line, plan.headers[plan.timeColumn], this.textOf(bytes, a, b), this.times.reason)
      return
    }
    this.before[id] = t
    if (plan.qualityColumn >= 0) {
      a = from[plan.qualityColumn]
      b = to[plan.qualityColumn]
      if (!this.lastQuality.same(bytes, a, b)) this.lastQuality.keep(bytes, a, b, QUALITIES.indexOf(readQuality(this.textOf(bytes, a, b))))
      const quality = this.lastQuality.code
      if (quality === 3) {
        log.reject(this.line, plan.headers[plan.qualityColumn], this.textOf(bytes, a, b), 'the quality is neither a known word nor an OPC number')
        return
      }
      if (quality === 2) {
        log.missing.badQuality++
        return
      }
      if (quality === 1) log.uncertain++
    }
    a = from[plan.valueColumn]
    b = to[plan.valueColumn]
    if (kind === 'mode') {
      const lastMode = this.lastModes[id]
      if (!lastMode.same(bytes, a, b)) lastMode.keep(bytes, a, b, this.modes.codeOf(this.textOf(bytes, a, b)))
      if (lastMode.code === MODE_UNKNOWN) { log.missing[a === b ? 'empty' : 'text']++ }
      else {
        log.samples++
        this.sink.push(t, id, lastMode.code)
      }
      return
    }
    // the plain number, as in WideScanner
    let q = a
    const negative = bytes[q] === 45
    if (negative || bytes[q] === 43) q++
    let mantissa = 0
    let digits = 0
    let d = bytes[q] - 48
    while (d >= 0 && d <= 9 && q < b) {
      mantissa = mantissa * 10 + d
      digits++
      d = bytes[++q] - 48
    }
    let fraction = 0
    if (q < b && bytes[q] === plan.decimal.charCodeAt(0)) {
      d = bytes[++q] - 48
      while (d >= 0 && d <= 9 && q < b) {
        mantissa = mantissa * 10 + d
        fraction++
        d = bytes[++q] - 48
      }
      digits += fraction
    }
    if (q === b && digits > 0 && digits <= 15) {
      const value = fraction === 0 ? mantissa : mantissa / POWERS[fraction]
      log.samples++
      this.sink.push(t, id, negative ? -value : value)
      return
    }
    const text = this.textOf(bytes, a, b)
    const cell = readCell(text, plan.decimal)
    if (cell.kind === 'number') {
      log.samples++
      this.sink.push(t, id, cell.value)
    }
    else if (cell.kind === 'garbled') { log.reject(this.line, plan.headers[plan.valueColumn], text, cell.reason) }
    else { log.missing[cell.kind]++ }
  }

  private oddRecord(bytes: Uint8Array, start: number, to: number, last: boolean): number {
    const { plan, log } = this
    let end = recordEnd(bytes, start, to, plan.delimiter.charCodeAt(0))
    if (end < 0 && !last && to - start < LONGEST_RECORD) return -(start + 1)
    log.rows++
    if (end < 0 || end - start > LONGEST_RECORD) {
      end = start
      while (bytes[end] !== NEWLINE) end++
      end++
      log.reject(this.line++, '', this.textOf(bytes, start, Math.min(end, start + 300)).trimEnd(), 'a quote is opened and never closed')
      return end
    }
    let newlines = 0
    for (let p = start; p < end; p++) if (bytes[p] === NEWLINE) newlines++
    const cells = readRecord(this.textOf(bytes, start, end).replace(/\r?\n$/, ''), plan.delimiter)
    if (cells.length < plan.headers.length || cells.slice(plan.headers.length).some(x => x !== '')) { log.reject(this.line, '', this.textOf(bytes, start, Math.min(end, start + 300)).trimEnd(), `the header has ${plan.headers.length} columns, this line has not`) }
    else {
      // laid out again without quotes, so that one piece of code takes every line
      const parts = cells.slice(0, plan.headers.length).map(cell => Buffer.from(cell))
      const joined = Buffer.concat(parts)
      parts.reduce((at, part, k) => {
        this.from[k] = at
        this.to[k] = at + part.length
        return at + part.length
      }, 0)
      const decode = plan.decode
      plan.decode = part => Buffer.from(part.buffer, part.byteOffset, part.length).toString('utf8')
      this.take(joined)
      plan.decode = decode
    }
    this.line += newlines
    return end
  }
}
