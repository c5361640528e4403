import { ZoneClock } from './zoneClock'

export type DateOrder = 'yearFirst' | 'dayFirst' | 'monthFirst'
export type TimeFormat = { kind: 'epoch', unit: 's' | 'ms' } | { kind: 'calendar', order: DateOrder }

const MONTHS = ['jan', 'feb', 'mar', 'apr', 'may', 'jun', 'jul', 'aug', 'sep', 'oct', 'nov', 'dec']
const DAYS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]
const NUMBER = /^[+-]?\d+(?:\.\d+)?$/

/** The three numbers of a date as written, with the month's place when it is a word; null when it is no date. */
export interface DateParts { a: number, b: number, c: number, digits: [number, number, number], monthWord: boolean, rest: number }

const isDigit = (c: number) => c >= 48 && c <= 57

/** Splits the date at the start of bytes[from..to). `rest` is the offset behind it. */
export function readDateParts(bytes: Uint8Array, from: number, to: number): DateParts | null {
  let p = from
  const values = [0, 0, 0]
  const digits: [number, number, number] = [0, 0, 0]
  let monthWord = false
  let mark = 0
  for (let k = 0; k < 3; k++) {
    if (k > 0) {
      const c = bytes[p]
      if (p >= to || !(c === 45 || c === 47 || c === 46 || c === 32) || (k === 2 && c !== mark)) return null
      mark = c
      p++
    }
    if (p < to && isDigit(bytes[p])) {
      let v = 0
      while (p < to && isDigit(bytes[p]) && digits[k] < 5) {
        v = v * 10 + bytes[p++] - 48
        digits[k]++
      }
      values[k] = v
    }
    else if (k < 2 && !monthWord) {
      let word = ''
      while (p < to && word.length < 9 && ((bytes[p] | 32) >= 97 && (bytes[p] | 32) <= 122)) word += String.fromCharCode(bytes[p++] | 32)
      const month = word.length >= 3 ? MONTHS.findIndex(m => word.startsWith(m)) : -1
      if (month < 0) return null
      values[k] = month + 1
      digits[k] = -1
      monthWord = true
    }
    else { return null }
  }
  return { a: values[0], b: values[1], c: values[2], digits, monthWord, rest: p }
}

/** Reads time stamps of one format into epoch ms UTC. Says in `reason` why it returned NaN. */
export class TimeReader {
  reason = ''
  private last = new Uint8Array(40)
  private lastLength = -1
  /** the time that `sameAsLast` speaks of */
  lastUtc = NaN
  private datePrefix = new Uint8Array(16)
  private datePrefixLength = 0
  private dateMs = 0
  private readonly clock: ZoneClock

  constructor(private readonly format: TimeFormat, zone: string, descending = false) {
    this.clock = new ZoneClock(zone, descending)
  }

  /**
   * @param before the time of the sample before this one in the same series (NaN: none); only the doubled hour asks
   * @returns epoch ms, whole, or NaN with `reason`
   */
  read(bytes: Uint8Array, from: number, to: number, before: number): number {
    const length = to - from
    if (length === this.lastLength) {
      const last = this.last
      let i = 0
      while (i < length && last[i] === bytes[from + i]) i++
      if (i === length) return this.lastUtc
    }
    this.lastLength = -1
    if (length === 0) {
      this.reason = 'time stamp is empty'
      return NaN
    }
    const utc = this.format.kind === 'epoch' ? this.readEpoch(bytes, from, to) : this.readCalendar(bytes, from, to, before)
    // a time of the doubled hour depends on its series, so it is never taken from the cache
    if (utc === utc && length <= this.last.length && !(this.format.kind === 'calendar' && this.clock.ambiguous)) {
      for (let i = 0; i < length; i++) this.last[i] = bytes[from + i]
      this.lastLength = length
      this.lastUtc = utc
    }
    return utc
  }

  /** The end of the time stamp at `from` when it is the last one again and a delimiter follows; else -1. */
  sameAsLast(bytes: Uint8Array, from: number, delimiter: number): number {
    const n = this.lastLength
    if (n < 0 || bytes[from + n] !== delimiter) return -1
    const last = this.last
    for (let i = 0; i < n; i++) if (last[i] !== bytes[from + i]) return -1
    return from + n
  }

  private readEpoch(bytes: Uint8Array, from: number, to: number): number {
    const text = Buffer.from(bytes.buffer, bytes.byteOffset + from, to - from).toString('latin1').replace(',', '.')
    if (!NUMBER.test(text)) {
      this.reason = 'time stamp is not a number of seconds or milliseconds'
      return NaN
    }
    return this.inRange(Math.round(Number(text) * (this.format.kind === 'epoch' && this.format.unit === 's' ? 1000 : 1)))
  }

  private inRange(ms: number): number {
    // 1970 to 2200: outside of it the column is no time, or the unit is wrong
    if (ms >= 0 && ms < 7_258_118_400_000) return ms
    this.reason = 'time stamp lies outside the years 1970 to 2200'
    return NaN
  }

  private readCalendar(bytes: Uint8Array, from: number, to: number, before: number): number {
    let p = from
    let i = 0
    while (i < this.datePrefixLength && bytes[from + i] === this.datePrefix[i]) i++
    if (this.datePrefixLength > 0 && i === this.datePrefixLength && from + i <= to && !(from + i < to && isDigit(bytes[from + i]))) { p = from + i }
    else {
      const parts = readDateParts(bytes, from, to)
      const ms = parts ? this.dateOf(parts) : NaN
      if (ms !== ms) {
        if (!parts) this.reason = 'time stamp is not in the format of the file'
        return NaN
      }
      p = parts!.rest
      this.dateMs = ms
      this.datePrefixLength = p - from <= 16 ? p - from : 0
      for (let k = 0; k < this.datePrefixLength; k++) this.datePrefix[k] = bytes[from + k]
    }
    let local = this.dateMs
    this.clock.ambiguous = false
    if (p < to && (bytes[p] === 84 || bytes[p] === 116 || bytes[p] === 32)) {
      p++
      while (p < to && bytes[p] === 32) p++
      const two = () => {
        if (p >= to || !isDigit(bytes[p])) return NaN
        let v = bytes[p++] - 48
        if (p < to && isDigit(bytes[p])) v = v * 10 + bytes[p++] - 48
        return v
      }
      let hour = two()
      let minute = 0
      let second = 0
      let ms = 0
      if (bytes[p] === 58 && p < to) {
        p++
        minute = two()
        if (p < to && bytes[p] === 58) {
          p++
          second = two()
          if (p < to && (bytes[p] === 46 || bytes[p] === 44)) {
            p++
            let scale = 100
            if (!isDigit(bytes[p])) second = NaN
            while (p < to && isDigit(bytes[p])) {
              ms += (bytes[p++] - 48) * scale
              scale /= 10
            }
          }
        }
      }
      else { minute = NaN }
      if (p < to && bytes[p] === 32 && p + 2 < to && (bytes[p + 2] | 32) === 109) p++
      if (p + 1 < to && (bytes[p + 1] | 32) === 109 && ((bytes[p] | 32) === 97 || (bytes[p] | 32) === 112)) {
        const afternoon = (bytes[p] | 32) === 112
        if (hour < 1 || hour > 12) hour = NaN
        hour = (hour % 12) + (afternoon ? 12 : 0)
        p += 2
      }
      if (!(hour <= 23 && minute <= 59 && second <= 59)) {
        this.reason = 'time of day cannot be read'
        return NaN
      }
      local += hour * 3_600_000 + minute * 60_000 + second * 1000 + Math.round(ms)
      if (p < to && bytes[p] === 32 && p + 1 < to && (bytes[p + 1] === 43 || bytes[p + 1] === 45 || bytes[p + 1] === 90)) p++
      if (p < to && (bytes[p] === 90 || bytes[p] === 122) && p + 1 === to) return this.inRange(local)
      if (p < to && (bytes[p] === 43 || bytes[p] === 45)) {
        const sign = bytes[p++] === 43 ? 1 : -1
        const hours = two()
        if (p < to && bytes[p] === 58) p++
        const minutes = p < to ? two() : 0
        if (p !== to || !(hours <= 15 && minutes <= 59)) {
          this.reason = 'offset from UTC cannot be read'
          return NaN
        }
        return this.inRange(local - sign * (hours * 60 + minutes) * 60_000)
      }
    }
    if (p !== to) {
      this.reason = 'time stamp is not in the format of the file'
      return NaN
    }
    const utc = this.clock.toUtc(local, before)
    if (utc !== utc) {
      this.reason = `this local time does not exist in ${this.clock.zone}: the clocks were put forward`
      return NaN
    }
    return this.inRange(utc)
  }

  private dateOf({ a, b, c, digits, monthWord }: DateParts): number {
    const order = this.format.kind === 'calendar' ? this.format.order : 'yearFirst'
    let year: number, month: number, day: number
    if (monthWord) [day, month, year] = digits[0] === -1 ? [b, a, c] : digits[0] === 4 ? [c, b, a] : [a, b, c]
    else if (digits[0] >= 4 || order === 'yearFirst') [year, month, day] = [a, b, c]
    else if (order === 'dayFirst') [day, month, year] = [a, b, c]
    else [month, day, year] = [a, b, c]
    if (year < 100) year += 2000
    const leap = month === 2 && year % 4 === 0 && (year % 100 !== 0 || year % 400 === 0) ? 1 : 0
    if (month < 1 || month > 12 || day < 1 || day > DAYS[month - 1] + leap) {
      this.reason = 'this date does not exist'
      return NaN
    }
    return Date.UTC(year, month - 1, day)
  }
}
