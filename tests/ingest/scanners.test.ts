import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { parse } from 'csv-parse/sync'
import { afterAll, describe, expect, it } from 'vitest'
import { LongScanner } from '../../server/services/imports/scan/longScanner'
import { LongSink } from '../../server/services/imports/scan/longSink'
import { ModeNames } from '../../server/services/imports/scan/modeNames'
import { ScanLog } from '../../server/services/imports/scan/scanLog'
import { openTextFile, readRegions } from '../../server/services/imports/scan/textFile'
import { TimeReader } from '../../server/services/imports/scan/timeReader'
import { WideScanner } from '../../server/services/imports/scan/wideScanner'
import { WideSink } from '../../server/services/imports/scan/wideSink'
import { seededRandom } from '../../shared/assessment/statistics/seededRandom'

const folder = mkdtempSync(join(tmpdir(), 'fettle-scan-'))
afterAll(() => rmSync(folder, { recursive: true, force: true }))
const decode = (bytes: Uint8Array) => Buffer.from(bytes).toString('utf8')

/** Feeds text in pieces of any size, so that cells, quotes and line ends are cut everywhere. */
function feed(scan: (bytes: Uint8Array, from: number, to: number, last: boolean) => number, text: string, piece: () => number): void {
  const all = Buffer.from(text)
  const buffer = Buffer.alloc(all.length + 16)
  let filled = 0
  let at = 0
  while (at < all.length) {
    const n = Math.min(piece(), all.length - at)
    all.copy(buffer, filled, at, at + n)
    filled += n
    at += n
    const last = at === all.length
    if (last && buffer[filled - 1] !== 10) buffer[filled++] = 10
    const newline = buffer.subarray(0, filled).lastIndexOf(10)
    if (newline < 0) continue
    const done = scan(buffer, 0, newline + 1, last)
    buffer.copyWithin(0, done, filled)
    filled -= done
  }
  expect(filled).toBe(0)
}

interface Taken { t: number, values: (number | string)[] }

function scanWide(text: string, columns: string[], delimiter: string, decimal: '.' | ',', piece = () => 1 << 16) {
  const targets = new Int32Array(columns.length).fill(-1)
  let value = 0
  let mode = 0
  columns.forEach((name, i) => {
    if (name.endsWith('.PV')) targets[i] = value++
    if (name.endsWith('.MODE')) targets[i] = -2 - mode++
  })
  const log = new ScanLog()
  const modes = new ModeNames()
  const taken: Taken[] = []
  const sink = new WideSink(value, mode, 1 << 16, (s) => {
    for (let row = 0; row < s.rows; row++) {
      const pick = Array.from(targets, x => x >= 0 ? s.values[x * s.capacity + row] : x < -1 ? (modes.names[s.modes[(-2 - x) * s.capacity + row]] ?? '') : '').filter((_, i) => targets[i] !== -1)
      taken.push({ t: s.t[row], values: pick })
    }
  })
  const scanner = new WideScanner({ delimiter, decimal, timeColumn: 0, headers: columns, targets, decode }, sink, new TimeReader({ kind: 'calendar', order: 'yearFirst' }, 'UTC'), modes, log, 2)
  feed(scanner.scan.bind(scanner), text, piece)
  sink.flush()
  return { taken, log, scanner }
}

/** What csv-parse and Number() say about the same text, by code that shares nothing with the scanners. */
function judgeWide(text: string, columns: string[], delimiter: string, decimal: '.' | ',') {
  const records = parse(text, { delimiter, relax_quotes: true, relax_column_count: true, skip_empty_lines: true, info: true }) as unknown as { record: string[], info: { lines: number } }[]
  const counts = { empty: 0, nan: 0, text: 0, rejected: 0, samples: 0 }
  const taken: Taken[] = []
  for (const { record } of records) {
    if (record.length < columns.length || record.slice(columns.length).some(x => x !== '')) {
      counts.rejected++
      continue
    }
    const t = Date.parse(record[0].trim())
    if (!/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ$/.test(record[0].trim()) || Number.isNaN(t)) {
      counts.rejected++
      continue
    }
    const values: (number | string)[] = []
    columns.forEach((name, i) => {
      const cell = record[i].trim()
      if (name.endsWith('.PV')) {
        const said = decimal === ',' ? (cell.includes('.') ? 'x' : cell.replace(',', '.')) : cell
        const value = /^[-+.\d][-+.\deE]*$/.test(said) && !/^[-+]?$/.test(said) ? Number(said) : NaN
        values.push(Number.isFinite(value) && cell !== '' ? value : NaN)
        if (cell === '') counts.empty++
        else if (/^[+-]?nan$/i.test(cell)) counts.nan++
        else if (Number.isFinite(value)) counts.samples++
        else if (/\d/.test(cell) && /^[+-]?[.,]?\d/.test(cell)) counts.rejected++
        else counts.text++
      }
      else if (name.endsWith('.MODE')) {
        values.push(cell.toUpperCase())
        if (cell === '') counts.empty++
        else counts.samples++
      }
    })
    taken.push({ t, values })
  }
  return { taken, counts }
}

const DAY = Date.UTC(2026, 10, 23)

describe('the scanner against csv-parse and Number()', () => {
  it('agrees on every cell of random files, cut anywhere', () => {
    const random = seededRandom(11)
    const u = () => random.uniform()
    for (let round = 0; round < 150; round++) {
      const delimiter = [',', ';', '\t', '|'][random.integer(4)]
      const decimal = delimiter !== ',' && u() < 0.4 ? ',' : '.'
      const columns = ['time', 'A.PV', 'note', 'B.PV', 'B.MODE', 'C.PV'].slice(0, 3 + random.integer(4))
      const number = () => {
        const digits = random.integer(22)
        let s = u() < 0.1 ? '' : String(random.integer(10 ** random.integer(7)))
        if (digits > 0 || s === '') s += decimal + Array.from({ length: Math.max(1, digits % 19) }, () => random.integer(10)).join('')
        if (u() < 0.05) s += `e${u() < 0.5 ? '-' : ''}${random.integer(30)}`
        return (u() < 0.2 ? '-' : u() < 0.05 ? '+' : '') + s
      }
      const odd = () => ['', 'NaN', '-nan', 'Bad', 'No Data', '-', '.', '+', '-.', '1.2.3', '5 kg', '1e', '--4', '1e999', '#N/A', ' 7 ', '0x1F', 'Infinity', '12-3', '1,2,3', '٣'][random.integer(21)]
      const quote = (cell: string) => u() < 0.25 || cell.includes(delimiter) ? `"${cell.replaceAll('"', '""')}"` : cell
      const line = (i: number) => columns.map((name, c) => {
        if (c === 0) return u() < 0.03 ? ['', 'yesterday', '2026-13-01T00:00:00Z', '2026-11-23T25:00:00Z'][random.integer(4)] : new Date(DAY + i * 10_000).toISOString().replace('.000', '')
        if (name === 'note') return u() < 0.2 ? `"a ""word""${u() < 0.3 ? '\nand more' : ''}"` : u() < 0.1 ? 'five 5" pipes' : 'x'
        if (name.endsWith('.MODE')) return quote(['AUTO', 'MAN', 'CAS', 'AUTONOMOUS', 'AUTOTUNE', ''][random.integer(6)])
        return quote(u() < 0.15 ? odd() : number())
      }).join(delimiter) + (u() < 0.02 ? delimiter : '') + (u() < 0.01 ? `${delimiter}extra` : '')
      const newline = u() < 0.5 ? '\n' : '\r\n'
      const lines = Array.from({ length: 60 }, (_, i) => u() < 0.02 ? '' : u() < 0.02 ? line(i).split(delimiter)[0] : line(i))
      const text = lines.join(newline) + (u() < 0.5 ? newline : '')
      if (text.trim() === '') continue
      const piece = () => 1 + random.integer(u() < 0.5 ? 40 : 5000)
      const got = scanWide(text, columns, delimiter, decimal, piece)
      const want = judgeWide(text, columns, delimiter, decimal)
      const context = JSON.stringify({ round, delimiter, decimal })
      expect(got.taken, context).toEqual(want.taken)
      expect({ ...got.log.missing, rejected: got.log.rejected, samples: got.log.samples }, context).toEqual({ ...want.counts, badQuality: 0 })
    }
  })

  it('long files agree with csv-parse too', () => {
    const random = seededRandom(12)
    for (let round = 0; round < 60; round++) {
      const tags = ['T-1.PV', 'T-1.OP', 'F 2.PV', 'Ü-3.PV', 'stranger']
      const lines = Array.from({ length: 200 }, (_, i) => {
        const tag = tags[random.integer(tags.length)]
        const cell = random.uniform() < 0.1 ? ['', 'Bad', 'NaN', '1.2.3', '-'][random.integer(5)] : (random.normal() * 100).toFixed(random.integer(18))
        const quoted = (x: string) => random.uniform() < 0.2 ? `"${x}"` : x
        return [new Date(DAY + i * 1000).toISOString(), quoted(tag), quoted(cell), ['Good', '192', '0', 'Bad', '64', 'Uncertain', '', 'perhaps'][random.integer(8)]].join(',')
      })
      const text = lines.join('\n')
      const log = new ScanLog()
      const got: [number, string, number][] = []
      const names: string[] = []
      const sink = new LongSink((s) => {
        for (let i = 0; i < s.rows; i++) got.push([s.t[i], names[s.series[i]], s.value[i]])
      })
      const plan = { delimiter: ',', decimal: '.' as const, headers: ['timestamp', 'tag', 'value', 'quality'], timeColumn: 0, tagColumn: 1, valueColumn: 2, qualityColumn: 3, decode }
      const scanner = new LongScanner(plan, sink, new TimeReader({ kind: 'calendar', order: 'yearFirst' }, 'UTC'), new ModeNames(), log, 2, (name, id) => {
        names[id] = name
        return name === 'stranger' ? 'ignore' : 'value'
      })
      feed(scanner.scan.bind(scanner), text, () => 1 + random.integer(900))
      sink.flush()
      const want: [number, string, number][] = []
      let bad = 0
      for (const [time, tag, value, quality] of parse(text) as string[][]) {
        if (tag === 'stranger' || quality === 'perhaps') continue
        if (quality === '0' || quality === 'Bad') {
          bad++
          continue
        }
        if (value !== '' && Number.isFinite(Number(value))) want.push([Date.parse(time), tag, Number(value)])
      }
      expect(got).toEqual(want)
      expect(log.missing.badQuality).toBe(bad)
      expect(log.rows).toBe(200)
    }
  })
})

describe('line numbers', () => {
  it('stay true behind newlines in quotes, blank lines and rejected lines', () => {
    const text = '2026-11-23T00:00:00Z,"a\nb\nc",1\n\nnonsense,x,2\n2026-11-23T00:00:10Z,x,1.2.3\n2026-11-23T00:00:20Z,x\n'
    const { log } = scanWide(text, ['time', 'note', 'A.PV'], ',', '.')
    expect(log.rejects).toEqual([
      { line: 6, column: 'time', cell: 'nonsense', reason: 'time stamp is not in the format of the file' },
      { line: 7, column: 'A.PV', cell: '1.2.3', reason: 'not a number' },
      { line: 8, column: '', cell: '2026-11-23T00:00:20Z,x', reason: 'the header has 3 columns, this line has not' },
    ])
  })

  it('a quote that is never closed costs its line and no other', () => {
    const rows = Array.from({ length: 9000 }, (_, i) => `${new Date(DAY + i * 1000).toISOString().replace('.000', '')},${i === 3 ? '"open' : 'x'},${i}`)
    const { log, taken } = scanWide(rows.join('\n'), ['time', 'note', 'A.PV'], ',', '.', () => 100_000)
    expect(log.rejects).toEqual([{ line: 5, column: '', cell: rows[3], reason: 'a quote is opened and never closed' }])
    expect(taken.length).toBe(8999)
  })
})

describe('regions of a file', () => {
  it('UTF-16 in both orders, Latin-1 and UTF-8 arrive as the same lines', async () => {
    const text = 'time;Öl-1.PV\n2026-11-23T00:00:00Z;1,5\n2026-11-23T00:00:10Z;2,5'
    const swap = (b: Buffer) => Buffer.from(b).swap16()
    const forms: Record<string, Buffer> = {
      'utf8': Buffer.from(text), 'utf8 with mark': Buffer.from(`\uFEFF${text}`), 'utf16le': Buffer.from(`\uFEFF${text}`, 'utf16le'), 'utf16le without mark': Buffer.from(text, 'utf16le'),
      'utf16be': swap(Buffer.from(`\uFEFF${text}`, 'utf16le')), 'latin1': Buffer.from(text, 'latin1'),
    }
    for (const [name, bytes] of Object.entries(forms)) {
      const path = join(folder, 'x.csv')
      writeFileSync(path, bytes)
      const file = await openTextFile(path)
      let seen = ''
      await readRegions(file, (b, from, to) => {
        seen += new TextDecoder(file.encoding === 'windows-1252' ? 'windows-1252' : 'utf-8').decode(b.subarray(from, to))
        return to
      })
      expect(seen.trimEnd(), name).toBe(text)
    }
  })
})
