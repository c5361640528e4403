import { readdirSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { listRejects } from '../../../db/repositories/importRejects'
import { findImport } from '../../../db/repositories/imports'
import { listLoops } from '../../../db/repositories/loops'
import { answerMapping } from '../../../server/services/imports/answerMapping'
import { readImport } from '../../../server/services/imports/readImport'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { dataDir, empty, removeDataDir, stored, upload } from './upload'

let scratch: ScratchDatabase
beforeAll(async () => { scratch = await scratchDatabase() })
afterAll(async () => {
  await scratch.drop()
  removeDataDir()
})
beforeEach(() => empty(scratch.db))

const START = Date.UTC(2026, 10, 23, 6)
const range = Array.from({ length: 60 }, (_, i) => i)
/** What every file of fixtures/exports/good says; by the formulas of fixtures/exports/make.mjs. */
const TIC = { t: range.map(i => START + i * 10_000), pv: range.map(i => (8500 + i) / 10), sp: range.map(() => 855), op: range.map(i => 30 + i / 4), mode: range.map(i => i < 50 ? 'AUTO' : 'MAN') }
const FIC = { t: TIC.t, pv: range.map(i => 12.5 - i / 8), sp: range.map(() => 12), op: range.map(i => 60 - i / 2), mode: range.map(() => 'CAS') }

describe('every form of an export holds the same samples', () => {
  for (const name of readdirSync(join(import.meta.dirname, '../../../fixtures/exports/good'))) {
    it(name, async () => {
      const done = await upload(scratch.db, { file: `good/${name}` }, { timezone: name.includes('berlin') ? 'Europe/Berlin' : 'UTC' })
      expect(done).toMatchObject({ status: 'assessing', error: null, rows: name.startsWith('long') ? 480 : 60, samples: 480, loops: 2, rejected: 0, changed: 0, missing: { empty: 0, nan: 0, text: 0, badQuality: 0 }, weeks: ['2026-W48'], toAssess: 2 })
      expect(await stored(scratch.db, 'TIC-1204')).toEqual(TIC)
      expect(await stored(scratch.db, 'FIC-211')).toEqual(FIC)
      const again = await upload(scratch.db, { file: 'good/wide-comma.csv' })
      expect(again).toMatchObject({ status: 'done', changed: 0, weeks: [], toAssess: 0, samples: 480 })
    })
  }
})

describe('files that cannot be read change nothing and say why', () => {
  const cases: Record<string, RegExp> = {
    'empty.csv': /empty/, 'only-header.csv': /no rows/, 'picture.png': /not text/, 'page.html': /No header/, 'no-signals.csv': /No header/, 'no-time.csv': /No time column/, 'strange-times.csv': /time stamps are in no form/,
    'same-column-twice.csv': /same signal: TIC-1204.MEAS/, 'all-rows-bad.csv': /No row could be read. Line 2: this date does not exist/, 'cut-short.csv.gz': /damaged or cut short/,
    'two-files.zip': /more than one file/, 'damaged.zip': /damaged/, 'damaged.parquet': /Parquet file cannot be read/,
  }
  for (const [name, reason] of Object.entries(cases)) {
    it(name, async () => {
      const failed = await upload(scratch.db, { file: `bad/${name}` })
      expect(failed.status).toBe('failed')
      expect(failed.error).toMatch(reason)
      expect(failed.error).not.toMatch(/[\\/]uploads/)
      expect(await listLoops(scratch.db)).toEqual([])
    })
  }
})

describe('bad rows and cells', () => {
  it('are rejected one by one with line, column, text and reason; their neighbours go in', async () => {
    const done = await upload(scratch.db, { file: 'bad/mixed.csv' })
    expect(done).toMatchObject({ status: 'assessing', rows: 12, rejected: 7, missing: { empty: 2, nan: 1, text: 4, badQuality: 0 } })
    expect(await listRejects(scratch.db, done.id, 100)).toEqual([
      { line: 6, column: 'TIC-1204.PV', cell: '12.3.4', reason: 'not a number' },
      { line: 7, column: 'timestamp', cell: 'yesterday', reason: 'time stamp is not in the format of the file' },
      { line: 8, column: '', cell: '2026-11-23T06:01:00Z,850.7,855', reason: 'the header has 5 columns, this line has not' },
      { line: 9, column: '', cell: '2026-11-23T06:01:10Z,850.8,855,11.8,AUTO,surplus', reason: 'the header has 5 columns, this line has not' },
      { line: 11, column: 'TIC-1204.PV', cell: '1e999', reason: 'number is too large' },
      { line: 11, column: 'FIC-211.PV', cell: '5 kg', reason: 'not a number' },
      { line: 12, column: 'TIC-1204.SP', cell: '8"55', reason: 'not a number' },
    ])
    const at = (s: number) => Date.UTC(2026, 10, 23, 6, 0, s)
    const tic = (await stored(scratch.db, 'TIC-1204'))!
    expect(tic.t).toEqual([0, 10, 20, 30, 40, 80, 90, 100, 110].map(at))
    expect(tic.pv).toEqual([850.1, NaN, 850.3, 850.4, NaN, NaN, NaN, 850.9, 851])
    expect(tic.sp).toEqual([855, 855, NaN, 855, 855, NaN, 855, NaN, 855])
    expect(done.samples).toBe(tic.pv!.filter(v => v === v).length + tic.sp!.filter(v => v === v).length + (await stored(scratch.db, 'FIC-211'))!.pv!.filter(v => v === v).length + 8)
  })

  it('OPC quality by word and by number (OPC Data Access 2.05, quality bits 7-6)', async () => {
    const done = await upload(scratch.db, { file: 'bad/mixed-quality.csv' })
    expect(done).toMatchObject({ rows: 9, samples: 3, rejected: 2, missing: { empty: 0, nan: 0, text: 0, badQuality: 3 } })
    expect((await stored(scratch.db, 'TIC-1204'))!.pv).toEqual([850.1, 850.4, 850.7])
    expect((await listRejects(scratch.db, done.id, 10)).map(r => [r.line, r.column, r.cell])).toEqual([[7, 'quality', 'perhaps'], [9, 'tag', '']])
    expect(done.mapping).toMatchObject({ uncertain: 1, ignoredColumns: ['some other point'] })
  })
})

describe('local times', () => {
  it('the doubled hour is resolved by order', async () => {
    const done = await upload(scratch.db, { file: 'bad/doubled-hour.csv' }, { timezone: 'Europe/London' })
    expect(done.rejected).toBe(0)
    // the clocks of London go back at 01:00 UTC on the last Sunday of October (EU directive 2000/84/EC's rule, kept by the UK)
    expect((await stored(scratch.db, 'TIC-1204'))!.t).toEqual(Array.from({ length: 14 }, (_, i) => Date.UTC(2026, 9, 24, 23, 50) + i * 600_000))
  })

  it('a time that the clocks jump over is rejected', async () => {
    const done = await upload(scratch.db, { file: 'bad/missing-hour.csv' }, { timezone: 'Europe/London' })
    expect(done).toMatchObject({ samples: 2, rejected: 1 })
    expect((await listRejects(scratch.db, done.id, 5))[0]).toMatchObject({ line: 3, cell: '2026-03-29 01:10:00' })
  })

  it('days and months that cannot be told apart are asked for, and the answer is taken', async () => {
    const asked = await upload(scratch.db, { file: 'bad/ambiguous-dates.csv' }, { timezone: 'UTC' })
    expect(asked).toMatchObject({ status: 'needsMapping', mapping: { questions: ['dateOrder'], dateOrders: ['dayFirst', 'monthFirst'] } })
    expect(await listLoops(scratch.db)).toEqual([])
    await answerMapping(scratch.db, asked.id, { dateOrder: 'monthFirst' }, { userId: null, name: 'test' })
    await readImport(scratch.db, asked.id, { dataDir })
    expect(await findImport(scratch.db, asked.id)).toMatchObject({ status: 'assessing', samples: 480 })
    expect((await stored(scratch.db, 'FIC-211'))!.t[0]).toBe(Date.UTC(2026, 2, 4, 6))
    expect(await upload(scratch.db, { file: 'bad/two-digit-year.csv' })).toMatchObject({ status: 'needsMapping', mapping: { dateOrders: ['dayFirst', 'yearFirst'] } })
  })
})

describe('a very wide file', () => {
  it('of 6,000 loops is recognised by a header longer than a first look', async () => {
    const tags = Array.from({ length: 6000 }, (_, i) => `AREA-12-FURNACE-LINE-3-ZONE-TIC-${10_000 + i}`)
    const done = await upload(scratch.db, { text: `time,${tags.map(t => `${t}.PV`).join()}\n2026-11-23T06:00:00Z,${tags.map((_, i) => i).join()}\n` })
    expect(done).toMatchObject({ status: 'assessing', rows: 1, samples: 6000, loops: 6000 })
  })
})

describe('unknown loops', () => {
  it('are created with a type from the letters of the tag and a guessed range', async () => {
    await upload(scratch.db, { file: 'good/wide-comma.csv' }, { unknown: 'create' })
    expect((await listLoops(scratch.db)).map(l => [l.tag, l.type, l.rangeGuessed, l.pvLow! <= Math.min(...(l.tag === 'TIC-1204' ? TIC : FIC).pv), l.pvHigh! >= Math.max(...(l.tag === 'TIC-1204' ? TIC : FIC).pv), l.opLow, l.opHigh]))
      .toEqual([['FIC-211', 'flow', true, true, true, 0, 100], ['TIC-1204', 'temperature', true, true, true, 0, 100]])
  })

  for (const file of ['good/wide-comma.csv', 'good/long-tag-order.csv']) {
    it(`are skipped, or asked for and answered: ${file}`, async () => {
      expect(await upload(scratch.db, { file }, { unknown: 'skip' })).toMatchObject({ status: 'done', samples: 0, loops: 0, mapping: { skippedLoops: ['FIC-211', 'TIC-1204'] } })
      const asked = await upload(scratch.db, { file }, { unknown: 'ask' })
      expect(asked.status).toBe('needsMapping')
      expect((asked.mapping as { loops: { tag: string, known: boolean }[] }).loops.map(l => [l.tag, l.known]).sort()).toEqual([['FIC-211', false], ['TIC-1204', false]])
      expect(await listLoops(scratch.db)).toEqual([])
      await answerMapping(scratch.db, asked.id, { loops: [{ tag: 'TIC-1204', action: 'create', type: 'other' }, { tag: 'FIC-211', action: 'skip' }] }, { userId: null, name: 'test' })
      await readImport(scratch.db, asked.id, { dataDir })
      expect(await findImport(scratch.db, asked.id)).toMatchObject({ status: 'assessing', loops: 1, samples: 240, mapping: { skippedLoops: ['FIC-211'] } })
      expect((await listLoops(scratch.db)).map(l => [l.tag, l.type])).toEqual([['TIC-1204', 'other']])
      await expect(answerMapping(scratch.db, asked.id, {}, { userId: null, name: 'test' })).rejects.toMatchObject({ statusCode: 409 })
    })
  }
})
