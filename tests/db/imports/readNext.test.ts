import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { hasUpload, readNextImports } from '../../../server/services/imports/readNextImports'
import { recordUpload } from '../../../server/services/imports/receiveUpload'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { dataDir, removeDataDir } from './upload'

let scratch: ScratchDatabase
const elsewhere = mkdtempSync(join(tmpdir(), 'fettle-elsewhere-'))
beforeAll(async () => { scratch = await scratchDatabase() })
afterAll(async () => {
  await scratch.drop()
  removeDataDir()
  rmSync(elsewhere, { recursive: true, force: true })
})

const statuses = () => scratch.db('imports').orderBy('id').pluck('status')
/** A worker that looks once, and marks what it reads as done. */
async function look(folder?: string): Promise<number[]> {
  const read: number[] = []
  await readNextImports(scratch.db, scratch.url, async ({ id }) => {
    read.push(id)
    await scratch.db('imports').where({ id }).update({ status: 'done' })
  }, () => false, folder === undefined ? undefined : row => hasUpload(folder, row))
  return read
}

it('a worker on another machine leaves uploads that it does not have, and holds up nobody', async () => {
  const ids: number[] = []
  for (const fileKey of ['first', 'second']) {
    writeFileSync(join(dataDir, 'uploads', fileKey), 'time,FIC-1.PV\n')
    ids.push((await recordUpload(scratch.db, { name: fileKey, options: {}, idempotencyKey: null, sender: { userId: null, tokenId: null, name: 'test' }, dataDir, limitBytes: 1e9, fileKey, bytes: 14, sha256: '' })).id)
  }
  expect(await look(elsewhere)).toEqual([])
  expect(await statuses()).toEqual(['received', 'received'])
  // one with the same folder reads them, in the order of arrival
  expect(await look(dataDir)).toEqual(ids)
  expect(await statuses()).toEqual(['done', 'done'])
})

it('the server asks after clients that fell silent, so that what they had locked is freed', async () => {
  const { rows } = await scratch.db.raw('show tcp_keepalives_idle')
  expect(Number(rows[0].tcp_keepalives_idle)).toBeLessThanOrEqual(60)
})
