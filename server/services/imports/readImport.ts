import { unlink } from 'node:fs/promises'
import { join } from 'node:path'
import type { Knex } from 'knex'
import { writeRejects } from '../../../db/repositories/importRejects'
import { findImport, updateImport, type ImportRow } from '../../../db/repositories/imports'
import { insertLoops, listLoops, updateLoop, type LoopRow } from '../../../db/repositories/loops'
import { blockKey, storeBlocks } from '../../../db/repositories/trendBlocks'
import { weeksBetween } from '../../../shared/assessment/week/isoWeek'
import { listLoopWeekKeys } from '../../../db/repositories/loopWeekWrites'
import { requestAssessments } from '../assessments/requestAssessments'
import { getSettings } from '../settings'
import { BlockCollector, SIGNALS } from './blockCollector'
import { guessOutputRange, guessRange, typeOfTag } from './guessLoop'
import type { ImportOptions } from './importOptions'
import { parquetToCsv } from './parquetToCsv'
import { LongScanner } from './scan/longScanner'
import { LongSink } from './scan/longSink'
import { ModeNames } from './scan/modeNames'
import { recognise, type Recognition } from './scan/recognise'
import { ScanLog } from './scan/scanLog'
import { splitSignalName, type LoopSignal } from './scan/signalNames'
import { decoderOf, openTextFile, readRegions, type TextFile } from './scan/textFile'
import { TimeReader } from './scan/timeReader'
import { UnreadableFile } from './scan/unreadableFile'
import { IGNORE, WideScanner } from './scan/wideScanner'
import { WideSink } from './scan/wideSink'
import { isZone } from './scan/zoneClock'

/** A file that stopped its worker so often is not tried again. */
const MOST_ATTEMPTS = 5
const PROGRESS_EVERY_MS = 400
/** Encoded blocks are stored once they come to so much, while the next ones are read. */
const STORE_BYTES = 4 << 20
const MOST_BYTES = 384 << 20

export interface ReadOptions { dataDir: string, valueBytes?: number, now?: () => number, note?: (line: string) => void }

/** The reading waits for an answer of a person. */
class Question extends Error {
  constructor(readonly mapping: Record<string, unknown>) { super('needs mapping') }
}

/**
 * Reads one import into day blocks, with flat memory, in one transaction: until it commits nothing of the file is
 * visible, and a worker killed in the middle leaves nothing behind.
 */
export async function readImport(db: Knex, importId: number, options: ReadOptions): Promise<void> {
  const row = await findImport(db, importId)
  if (!row || !['received', 'reading'].includes(row.status)) return
  const now = options.now ?? Date.now
  const fail = (error: string) => updateImport(db, importId, { status: 'failed', error, progress: 0, secondsLeft: null, finishedAt: new Date(now()) })
  if (row.attempts >= MOST_ATTEMPTS) {
    await fail(`Reading this file stopped the worker ${MOST_ATTEMPTS} times; it is not tried again. Nothing of it was taken in.`)
    return
  }
  await updateImport(db, importId, { status: 'reading', startedAt: row.startedAt ?? new Date(now()), attempts: row.attempts + 1, progress: 0, error: null })
  let temporary: string | null = null
  try {
    if (!row.fileKey) throw new UnreadableFile('The file of this import was already taken away.')
    let file = await openTextFile(join(options.dataDir, 'uploads', row.fileKey)).catch((error: NodeJS.ErrnoException) => {
      throw error.code === 'ENOENT' ? new UnreadableFile('The file of this import is not in the data folder of this worker. Workers that read need the same DATA_DIR as the web server.') : error
    })
    if (file.compression === 'parquet') file = await openTextFile(temporary = await parquetToCsv(file.path))
    await readText(db, row, file, options, now)
  }
  catch (error) {
    if (error instanceof Question) await updateImport(db, importId, { status: 'needsMapping', mapping: error.mapping, progress: 0, secondsLeft: null, attempts: 0 })
    else if (error instanceof UnreadableFile) await fail(error.message)
    else if (isTransient(error)) throw error
    else {
      console.error(`Import ${importId}:`, error)
      await fail('The file could not be read because of an error in the program; it was written to the log. Nothing of it was taken in.')
    }
  }
  finally {
    if (temporary) await unlink(temporary).catch(() => {})
  }
}

/** The database is away or chose this transaction to give way: the file stays and is read again. */
function isTransient(error: unknown): boolean {
  const { code = '', message = '', name = '' } = error as { code?: string, message?: string, name?: string }
  return /^(ECONN|EPIPE|57P|08|40001|40P01|53)/.test(code) || name === 'KnexTimeoutError' || /Connection (terminated|ended)|Unable to acquire a connection|Client has encountered a connection error/.test(message)
}

async function readText(db: Knex, row: ImportRow, file: TextFile, options: ReadOptions, now: () => number): Promise<void> {
  const wanted = row.options as ImportOptions
  const settings = await getSettings(db)
  const zone = wanted.timezone ?? settings.zone
  if (!isZone(zone)) throw new UnreadableFile(`"${zone}" is not a known time zone.`)
  const form = await recognise(file, wanted)
  const known = await listLoops(db)
  const find = tagFinder(known)
  const policy = wanted.unknown ?? 'create'
  const answers = new Map((wanted.loops ?? []).map(l => [l.tag, l]))
  const mayCreate = (tag: string) => policy === 'create' ? answers.get(tag)?.action !== 'skip' : answers.get(tag)?.action === 'create'

  if (!form.time) throw new Question(describe(form, file, zone, ['dateOrder'], form.layout === 'wide' ? loopsOf(form, find) : []))
  if (form.layout === 'wide' && policy === 'ask') {
    const loops = loopsOf(form, find)
    if (loops.some(l => !l.known && !answers.has(l.tag))) throw new Question(describe(form, file, zone, ['unknownLoops'], loops))
  }

  const log = new ScanLog()
  const modes = new ModeNames()
  const collector = new BlockCollector(modes.names)
  const indexOf = new Map<string, number>()
  const unknown = new Set<string>()
  const skipped = new Set<string>()
  /** Index of a loop in the collector, or -1 for one that is left out. */
  const loopIndex = (tag: string): number => {
    const loop = find(tag)
    const name = loop?.tag ?? tag
    const have = indexOf.get(name)
    if (have !== undefined) return have
    if (!loop && !mayCreate(tag)) {
      if (policy === 'ask' && !answers.has(tag)) unknown.add(tag)
      else skipped.add(tag)
      return -1
    }
    const index = collector.addLoop(name, loop?.id ?? null, !loop || loop.rangeGuessed)
    indexOf.set(name, index)
    return index
  }

  const times = new TimeReader(form.time, zone, form.descending)
  const decode = decoderOf(file.encoding)
  const ignored = new Set<string>()
  let sink: { flush(): void }
  let scanner: WideScanner | LongScanner
  if (form.layout === 'wide') {
    const targets = new Int32Array(form.headers.length).fill(IGNORE)
    const columns: { loop: number, pv: number, sp: number, op: number, mode: number }[] = []
    let values = 0
    let modeColumns = 0
    form.signals.forEach((s, i) => {
      if (i === form.timeColumn) return
      const loop = s ? loopIndex(s.tag) : -1
      if (!s) ignored.add(form.headers[i])
      if (!s || loop < 0) return
      columns[loop] ??= { loop, pv: -1, sp: -1, op: -1, mode: -1 }
      if (s.signal === 'mode') targets[i] = -2 - (columns[loop].mode = modeColumns++)
      else targets[i] = columns[loop][s.signal] = values++
    })
    const wide = new WideSink(values, modeColumns, options.valueBytes ?? 64 << 20, s => collector.takeWide(s, columns))
    sink = wide
    scanner = new WideScanner({ delimiter: form.delimiter, decimal: form.decimal, timeColumn: form.timeColumn, headers: form.headers, targets, decode }, wide, times, modes, log, 1)
  }
  else {
    const targets: number[] = []
    const long = new LongSink(s => collector.takeLong(s, targets))
    sink = long
    scanner = new LongScanner({ delimiter: form.delimiter, decimal: form.decimal, headers: form.headers, timeColumn: form.timeColumn, tagColumn: form.tagColumn, valueColumn: form.valueColumn, qualityColumn: form.qualityColumn, decode: file.encoding.startsWith('utf-16') ? decoderOf('utf-8') : decode }, long, times, modes, log, 1, (name, id) => {
      const s = signalOf(name, wanted)
      const loop = s ? loopIndex(s.tag) : -1
      if (!s) ignored.add(name)
      if (!s || loop < 0) return 'ignore'
      targets[id] = loop * 4 + SIGNALS.indexOf(s.signal)
      return s.signal === 'mode' ? 'mode' : 'value'
    })
  }

  const started = now()
  const report = progressReporter(db, row.id, log, file.bytes, now)
  await db.transaction(async (trx) => {
    const touched = new Map<number, Set<string>>()
    const written = new Set<string>()
    const ids: number[] = collector.loops.map(l => l.id ?? -1)
    let changed = 0
    let storing: Promise<void> = Promise.resolve()
    const ensureIds = async () => {
      const fresh = collector.loops.flatMap((l, i) => (ids[i] ??= l.id ?? -1) < 0 ? [{ i, tag: l.tag }] : [])
      if (fresh.length === 0) return
      const made = await insertLoops(trx, fresh.map(({ tag }) => ({ tag, type: answers.get(tag)?.type ?? typeOfTag(tag), description: answers.get(tag)?.description ?? '', rangeGuessed: true })))
      for (const { i, tag } of fresh) ids[i] = made.get(tag)!
    }
    const store = async (blocks: { loop: number, block: import('../../../db/blocks/types').TrendBlock }[]) => {
      await ensureIds()
      const ready = blocks.map(({ loop, block }) => ({ ...block, loopId: ids[loop] })).sort((a, b) => a.loopId - b.loopId || (a.day < b.day ? -1 : 1))
      for (const [i, outcome] of (await storeBlocks(trx, ready)).entries()) {
        const key = blockKey(ready[i])
        // a part of this same file laid over an earlier part of it is no change of what was stored before
        if (!written.has(key)) changed += outcome.changed
        written.add(key)
        if (Number.isNaN(outcome.fromMs)) continue
        let weeks = touched.get(outcome.loopId)
        if (!weeks) touched.set(outcome.loopId, weeks = new Set())
        for (const week of weeksBetween(outcome.fromMs, outcome.toMs + 1, settings.zone)) weeks.add(week)
      }
    }
    const storeSoon = async (blocks: Parameters<typeof store>[0]) => {
      await storing
      storing = store(blocks)
      // the error is thrown where it is awaited, not as one that nobody handled
      storing.catch(() => {})
    }
    let toSkip = form.headerLine
    await readRegions(file, async (bytes, from, to, last) => {
      let start = from
      while (toSkip > 0 && start < to) {
        if (bytes[start++] === 10) {
          toSkip--
          scanner.line++
        }
      }
      const done = start < to ? scanner.scan(bytes, start, to, last) : start
      if (collector.bytes > STORE_BYTES) {
        const closed = collector.drain(collector.bytes > MOST_BYTES)
        if (closed.length) await storeSoon(closed)
      }
      return done
    }, report.read)
    sink.flush()
    await storing
    if (unknown.size) throw new Question(describe(form, file, zone, ['unknownLoops'], [...indexOf.keys(), ...unknown].sort().map(tag => ({ tag, known: find(tag) !== null, signals: [], type: typeOfTag(tag) }))))
    await store(collector.drain(true))
    if (log.rows === 0) throw new UnreadableFile('The file has a header and no rows.')
    const nothingSeen = log.samples + log.missing.empty + log.missing.nan + log.missing.text + log.missing.badQuality === 0
    if (nothingSeen && skipped.size === 0) {
      const first = log.rejects[0]
      throw new UnreadableFile(first ? `No row could be read. Line ${first.line}: ${first.reason}${first.cell ? ` ("${first.cell.slice(0, 60)}")` : ''}.` : 'The file holds no signal of a loop.')
    }
    await rangesOf(trx, collector, ids, known, touched)
    await writeRejects(trx, row.id, log.rejects)
    const due = [...touched].flatMap(([loopId, weeks]) => [...weeks].map(week => ({ loopId, week })))
    const weeks = [...new Set(due.map(d => d.week))].sort()
    const finished = new Date(now())
    await report.stop()
    await updateImport(trx, row.id, {
      status: due.length ? 'assessing' : 'done', progress: due.length ? 0.4 : 1, secondsLeft: null, rows: log.rows, samples: log.samples, rejected: log.rejected, missing: { ...log.missing }, changed,
      loops: collector.loops.length, weeks, toAssess: due.length, assessed: 0, error: null, finishedAt: due.length ? null : finished,
      mapping: { ...describe(form, file, zone, [], []), uncertain: log.uncertain, ignoredColumns: [...ignored].slice(0, 200), skippedLoops: [...skipped].sort().slice(0, 2000), readSeconds: (now() - started) / 1000, assessingSince: finished.toISOString(), modes: modes.names },
    })
    await requestAssessments(trx, due, `import ${row.id}`, row.id)
  }).finally(() => report.stop())
}

const signalOf = (name: string, options: ImportOptions): LoopSignal | null => options.columns && name in options.columns ? options.columns[name] : splitSignalName(name)

/** Loops by tag; another case of the letters is the same loop, unless both exist. */
function tagFinder(loops: LoopRow[]): (tag: string) => LoopRow | null {
  const exact = new Map(loops.map(l => [l.tag, l]))
  const loose = new Map(loops.map(l => [l.tag.toUpperCase(), l]))
  return tag => exact.get(tag) ?? loose.get(tag.toUpperCase()) ?? null
}

function loopsOf(form: Recognition, find: (tag: string) => LoopRow | null) {
  const loops = new Map<string, { tag: string, known: boolean, signals: string[], type: string }>()
  for (const s of form.signals) {
    if (!s) continue
    const loop = loops.get(s.tag) ?? { tag: s.tag, known: find(s.tag) !== null, signals: [], type: typeOfTag(s.tag) }
    loop.signals.push(s.signal)
    loops.set(s.tag, loop)
  }
  return [...loops.values()]
}

/** What was recognised and what is asked, for the mapping step and for whoever wonders later. */
function describe(form: Recognition, file: TextFile, zone: string, questions: string[], loops: unknown[]): Record<string, unknown> {
  return {
    questions, layout: form.layout, delimiter: form.delimiter, decimal: form.decimal, encoding: file.encoding, compression: file.compression, timeColumn: form.headers[form.timeColumn],
    time: form.time, dateOrders: form.dateOrders, timeExamples: form.timeExamples, timezone: zone, headers: form.headers.length <= 200 ? form.headers : form.headers.slice(0, 200), loops,
    ignoredColumns: form.layout === 'wide' ? form.headers.filter((_, i) => i !== form.timeColumn && !form.signals[i]).slice(0, 200) : [],
  }
}

/** Ranges of new loops, and of those guessed earlier that the data have left; then all their weeks are due. */
async function rangesOf(trx: Knex.Transaction, collector: BlockCollector, ids: number[], known: LoopRow[], touched: Map<number, Set<string>>): Promise<void> {
  const byId = new Map(known.map(l => [l.id, l]))
  for (const [i, { seen }] of collector.loops.entries()) {
    if (!seen || ids[i] < 0 || !(seen.pvMax >= seen.pvMin || seen.opMax >= seen.opMin)) continue
    const loop = byId.get(ids[i])
    const pv = seen.pvMax >= seen.pvMin ? guessRange(Math.min(seen.pvMin, loop?.pvLow ?? Infinity), Math.max(seen.pvMax, loop?.pvHigh ?? -Infinity)) : { low: 0, high: 100 }
    const op = guessOutputRange(seen.opMin, seen.opMax)
    if (!loop || loop.pvLow === null || loop.pvHigh === null) await updateLoop(trx, ids[i], { pvLow: pv.low, pvHigh: pv.high, opLow: op.low, opHigh: op.high })
    else if (seen.pvMin < loop.pvLow || seen.pvMax > loop.pvHigh) {
      await updateLoop(trx, ids[i], { pvLow: Math.min(pv.low, loop.pvLow), pvHigh: Math.max(pv.high, loop.pvHigh) })
      const weeks = touched.get(ids[i]) ?? new Set<string>()
      for (const { week } of await listLoopWeekKeys(trx, { loopIds: [ids[i]] })) weeks.add(week)
      touched.set(ids[i], weeks)
    }
  }
}

/** Writes how far the reading is, outside the reading's own transaction, at most one write at a time. */
function progressReporter(db: Knex, importId: number, log: ScanLog, total: number, now: () => number) {
  const started = now()
  let last = started
  let writing: Promise<void> | null = null
  let stopped = false
  return {
    read(bytes: number) {
      if (stopped || writing || now() - last < PROGRESS_EVERY_MS) return
      last = now()
      const share = Math.min(1, bytes / total)
      writing = updateImport(db, importId, { progress: 0.4 * share, secondsLeft: share > 0.01 ? (last - started) / 1000 * (1 - share) / share : null, rows: log.rows, samples: log.samples, rejected: log.rejected })
        .catch(() => {}).finally(() => { writing = null })
    },
    async stop() {
      stopped = true
      await writing
    },
  }
}
