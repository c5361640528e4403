import { copyFileSync, mkdirSync, mkdtempSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Knex } from 'knex'
import { decodeBlocks } from '../../../db/blocks/decodeBlocks'
import { findImport, type ImportRow } from '../../../db/repositories/imports'
import { findLoop } from '../../../db/repositories/loops'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import type { ImportOptions } from '../../../server/services/imports/importOptions'
import { readImport } from '../../../server/services/imports/readImport'
import { recordUpload } from '../../../server/services/imports/receiveUpload'

export const dataDir = mkdtempSync(join(tmpdir(), 'fettle-ingest-'))
mkdirSync(join(dataDir, 'uploads'))
export const removeDataDir = () => rmSync(dataDir, { recursive: true, force: true })

let n = 0
/** Puts a file or text in the data folder, records it and reads it in this process. */
export async function upload(db: Knex, source: { file: string } | { text: string }, options: ImportOptions = {}, valueBytes?: number): Promise<ImportRow> {
  const fileKey = `f${n++}`
  const path = join(dataDir, 'uploads', fileKey)
  if ('file' in source) copyFileSync(join(import.meta.dirname, '../../../fixtures/exports', source.file), path)
  else writeFileSync(path, source.text)
  const { id } = await recordUpload(db, { name: fileKey, options, idempotencyKey: null, sender: { userId: null, tokenId: null, name: 'test' }, dataDir, limitBytes: 1e9, fileKey, bytes: statSync(path).size, sha256: '' })
  await readImport(db, id, { dataDir, valueBytes })
  return (await findImport(db, id))!
}

/** What is stored of a loop, as plain arrays. */
export async function stored(db: Knex, tag: string) {
  const loop = await findLoop(db, tag)
  if (!loop) return null
  const all = decodeBlocks(await listBlocks(db, [loop.id], 0, Date.UTC(2100, 0)), 0, Infinity)
  const plain = (x: Float64Array | null) => x && Array.from(x)
  return { t: Array.from(all.t), pv: plain(all.pv), sp: plain(all.sp), op: plain(all.op), mode: all.mode && Array.from(all.mode, code => all.modeNames[code] ?? null) }
}

export async function empty(db: Knex): Promise<void> {
  await db.raw('truncate loops, areas, imports, assessments_due, weeks_due cascade')
}
