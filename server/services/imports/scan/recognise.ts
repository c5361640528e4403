import { readRecord } from './records'
import { isQualityHeader, isTagHeader, isTimeHeader, isValueHeader, splitSignalName, type LoopSignal } from './signalNames'
import { firstText, readRegions, type TextFile } from './textFile'
import { readDateParts, TimeReader, type DateOrder, type TimeFormat } from './timeReader'
import { UnreadableFile } from './unreadableFile'

export interface Recognition {
  layout: 'wide' | 'long'
  delimiter: string
  decimal: '.' | ','
  /** 1-based line of the header */
  headerLine: number
  headers: string[]
  timeColumn: number
  /** null: day-first and month-first (or a year of two digits) cannot be told apart by the whole file */
  time: TimeFormat | null
  /** the orders that are left, when `time` is null */
  dateOrders: DateOrder[]
  timeExamples: string[]
  /** newest row first */
  descending: boolean
  /** wide: what each column is; null for columns that belong to no loop */
  signals: (LoopSignal | null)[]
  tagColumn: number
  valueColumn: number
  qualityColumn: number
}

export interface RecogniseOptions { layout?: 'wide' | 'long', dateOrder?: DateOrder, columns?: Record<string, LoopSignal | null> }

const DELIMITERS = [',', ';', '\t', '|']
const HEADER_LINES = 25

/** Finds out how an export is laid out. Throws UnreadableFile when there is no header it can understand. */
export async function recognise(file: TextFile, options: RecogniseOptions = {}): Promise<Recognition> {
  // thousands of loops side by side make a header that fills the first look alone
  let limit = 256 * 1024
  let text = await firstText(file, limit)
  if (text.length > limit * 0.9 && text.split('\n', 8).length < 8) text = await firstText(file, limit = 16 << 20)
  const lines = text.replace(/^\uFEFF/, '').split(/\r?\n/)
  if (lines.length > 1 && text.length > limit * 0.9) lines.pop()
  const found = findHeader(lines, options)
  if (!found) {
    throw new UnreadableFile('No header was found: a wide file needs a time column and columns such as TIC-1204.PV, a long file the columns timestamp, tag and value.')
  }
  const { delimiter, headerAt, headers, layout } = found
  const rows = lines.slice(headerAt + 1).filter(line => line.trim() !== '').slice(0, 100).map(line => cellsOf(line, delimiter))
  const signals = layout === 'wide' ? headers.map(h => signalFor(h, options)) : headers.map(() => null)
  const tagColumn = layout === 'long' ? headers.findIndex(isTagHeader) : -1
  const valueColumn = layout === 'long' ? headers.findIndex(isValueHeader) : -1
  const qualityColumn = layout === 'long' ? headers.findIndex((h, i) => i !== tagColumn && i !== valueColumn && isQualityHeader(h)) : -1
  const timeColumn = findTimeColumn(headers, rows, column => column === tagColumn || column === valueColumn || column === qualityColumn || signals[column] !== null)
  if (timeColumn < 0) throw new UnreadableFile('No time column was found.')
  const twice = duplicateSignal(headers, signals)
  if (twice) throw new UnreadableFile(`Two columns of the file are the same signal: ${twice}.`)

  const valueColumns = layout === 'long' ? [valueColumn] : signals.flatMap((s, i) => s && s.signal !== 'mode' ? [i] : [])
  const decimal = decimalOf(rows, valueColumns, delimiter)
  const timeCells = rows.map(row => (row[timeColumn] ?? '').trim()).filter(cell => cell !== '')
  const base: Recognition = {
    layout, delimiter, decimal, headerLine: headerAt + 1, headers, timeColumn, time: null, dateOrders: [], timeExamples: timeCells.slice(0, 3),
    descending: false, signals, tagColumn, valueColumn, qualityColumn,
  }
  const epoch = timeCells.filter(cell => /^\d{9,14}(?:[.,]\d+)?$/.test(cell))
  if (epoch.length > timeCells.length / 2) {
    const whole = Number(epoch[0].replace(',', '.'))
    base.time = { kind: 'epoch', unit: whole >= 1e11 ? 'ms' : 's' }
  }
  else if (timeCells.length > 0) {
    if (!timeCells.some(cell => readDateParts(Buffer.from(cell), 0, Buffer.byteLength(cell)))) {
      throw new UnreadableFile(`The time stamps are in no form that is known, for example "${timeCells[0].slice(0, 40)}".`)
    }
    const orders = await possibleOrders(file, base)
    if (orders.length === 1) base.time = { kind: 'calendar', order: orders[0] }
    else if (options.dateOrder && (orders.length === 0 || orders.includes(options.dateOrder))) base.time = { kind: 'calendar', order: options.dateOrder }
    else base.dateOrders = orders.length ? orders : ['dayFirst', 'monthFirst']
  }
  else { base.time = { kind: 'calendar', order: 'yearFirst' } }
  if (base.time) base.descending = isDescending(timeCells, base.time)
  return base
}

const signalFor = (header: string, options: RecogniseOptions): LoopSignal | null =>
  options.columns && header in options.columns ? options.columns[header] : isTimeHeader(header) ? null : splitSignalName(header)

/** Cells of a line for looking at it; the scanners do not use this. */
const cellsOf = (line: string, delimiter: string): string[] => line.includes('"') ? readRecord(line, delimiter) : line.split(delimiter)

function findHeader(lines: string[], options: RecogniseOptions): { layout: 'wide' | 'long', delimiter: string, headerAt: number, headers: string[] } | null {
  for (let at = 0; at < Math.min(lines.length, HEADER_LINES); at++) {
    let best: { layout: 'wide' | 'long', delimiter: string, headers: string[], score: number } | null = null
    for (const delimiter of DELIMITERS) {
      const headers = cellsOf(lines[at], delimiter).map(h => h.trim())
      if (headers.length < 2) continue
      const signals = headers.filter(h => signalFor(h, options)).length
      const long = headers.some(isTagHeader) && headers.some(isValueHeader) && headers.some(isTimeHeader)
      const layout = options.layout ?? (long ? 'long' : 'wide')
      const score = layout === 'long' ? (long ? 3 : 0) : signals
      if (score > 0 && score > (best?.score ?? 0)) best = { layout, delimiter, headers, score }
    }
    if (best) return { layout: best.layout, delimiter: best.delimiter, headerAt: at, headers: best.headers }
  }
  return null
}

function findTimeColumn(headers: string[], rows: string[][], taken: (column: number) => boolean): number {
  const named = headers.findIndex((h, i) => !taken(i) && isTimeHeader(h))
  if (named >= 0) return named
  return headers.findIndex((_, i) => !taken(i) && rows.length > 0 && rows.filter((row) => {
    const cell = (row[i] ?? '').trim()
    return /^\d{9,14}(\.\d+)?$/.test(cell) || readDateParts(Buffer.from(cell), 0, Buffer.byteLength(cell)) !== null
  }).length > rows.length / 2)
}

function duplicateSignal(headers: string[], signals: (LoopSignal | null)[]): string | null {
  const seen = new Set<string>()
  for (const [i, s] of signals.entries()) {
    if (!s) continue
    const key = `${s.tag}\n${s.signal}`
    if (seen.has(key)) return headers[i]
    seen.add(key)
  }
  return null
}

function decimalOf(rows: string[][], columns: number[], delimiter: string): '.' | ',' {
  let comma = 0
  let point = 0
  for (const row of rows) {
    for (const column of columns) {
      const cell = row[column]?.trim() ?? ''
      if (/^[+-]?\d*,\d+(e[+-]?\d+)?$/i.test(cell)) comma++
      else if (/^[+-]?\d*\.\d+(e[+-]?\d+)?$/i.test(cell)) point++
    }
  }
  // with a comma between the cells only quoted cells can hold a decimal comma, and those were unquoted above
  return comma > point && (delimiter !== ',' || comma > 0) ? ',' : '.'
}

/** Which orders of day, month and year fit the whole file. Stops reading as soon as one is left. */
async function possibleOrders(file: TextFile, base: Recognition): Promise<DateOrder[]> {
  let orders: DateOrder[] | null = null
  const delimiter = base.delimiter.charCodeAt(0)
  const last = new Uint8Array(16)
  let lastLength = 0
  let line = 0
  const judge = (bytes: Uint8Array, from: number, to: number) => {
    const parts = readDateParts(bytes, from, to)
    if (!parts) return
    lastLength = Math.min(16, parts.rest - from)
    for (let i = 0; i < lastLength; i++) last[i] = bytes[from + i]
    const { a, b, c, digits, monthWord } = parts
    if (monthWord || digits[0] >= 4) {
      orders = ['yearFirst']
      return
    }
    const possible: DateOrder[] = []
    if (a >= 1 && a <= 31 && b >= 1 && b <= 12) possible.push('dayFirst')
    if (b >= 1 && b <= 31 && a >= 1 && a <= 12) possible.push('monthFirst')
    // a year of two digits may stand in front as well as at the end
    if (digits[2] <= 2 && digits[0] === 2 && b >= 1 && b <= 12 && c >= 1 && c <= 31) possible.push('yearFirst')
    // a date that fits no order is a bad row, and says nothing about the others
    if (possible.length > 0) orders = orders ? orders.filter(o => possible.includes(o)) : possible
  }
  class Decided extends Error {}
  try {
    await readRegions(file, (bytes, from, to) => {
      let p = from
      while (p < to) {
        line++
        let column = 0
        let quoted = false
        let a = p
        for (;; p++) {
          const c = bytes[p]
          if (c === 34) quoted = !quoted
          if (c === 10 || (c === delimiter && !quoted)) {
            if (column === base.timeColumn && line > base.headerLine) {
              let b = p
              while (a < b && (bytes[a] === 34 || bytes[a] === 32)) a++
              while (b > a && (bytes[b - 1] === 34 || bytes[b - 1] === 13 || bytes[b - 1] === 32)) b--
              let i = 0
              while (i < lastLength && bytes[a + i] === last[i]) i++
              if (lastLength === 0 || i < lastLength || (bytes[a + i] >= 48 && bytes[a + i] <= 57)) judge(bytes, a, b)
              while (bytes[p] !== 10) p++
            }
            if (bytes[p] === 10) break
            column++
            a = p + 1
          }
        }
        p++
        if (orders !== null && (orders as DateOrder[]).length <= 1) throw new Decided()
      }
      return to
    })
  }
  catch (error) {
    if (!(error instanceof Decided)) throw error
  }
  return orders ?? []
}

function isDescending(cells: string[], format: TimeFormat): boolean {
  // offsets from UTC do not matter for the direction of a whole sample
  const reader = new TimeReader(format, 'UTC')
  const times = cells.map(cell => Buffer.from(cell)).map(bytes => reader.read(bytes, 0, bytes.length, NaN)).filter(t => t === t)
  return times.length > 1 && times[times.length - 1] < times[0]
}

