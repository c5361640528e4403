import { access, constants } from 'node:fs/promises'
import { join } from 'node:path'
import pg from 'pg'
import type { Knex } from 'knex'
import { ASK_AFTER_CLIENT } from '../../../db/knex'
import { findNextToRead, type ImportRow } from '../../../db/repositories/imports'

/** Whether a file lies in the uploads of a data folder. */
export async function hasUpload(dataDir: string, { fileKey }: { fileKey: string | null }): Promise<boolean> {
  return fileKey !== null && await access(join(dataDir, 'uploads', fileKey), constants.R_OK).then(() => true, () => false)
}

/** Any number; the same in every worker. */
const READING_LOCK = 7_340_111

/**
 * Reads waiting uploads one after another, in the order of their arrival: later uploads win sample by sample, so two
 * may not be read at once. The lock lives in a connection of its own; when the worker is killed the server drops it,
 * and another worker takes the upload up from its beginning; `mayRead` tells which uploads this one leaves to others.
 */
export async function readNextImports(db: Knex, databaseUrl: string, read: (row: ImportRow) => Promise<void>, stopped: () => boolean, mayRead: (row: ImportRow) => Promise<boolean> = async () => true): Promise<void> {
  const first = await findNextToRead(db)
  if (!first || !await mayRead(first)) return
  const holder = new pg.Client({ connectionString: databaseUrl, application_name: 'fettle-reading-lock', keepAlive: true, options: ASK_AFTER_CLIENT })
  let lost = false
  holder.on('error', () => { lost = true })
  await holder.connect()
  try {
    const { rows } = await holder.query('select pg_try_advisory_lock($1) as mine', [READING_LOCK])
    if (!rows[0].mine) return
    while (!stopped() && !lost) {
      const next = await findNextToRead(db)
      if (!next || !await mayRead(next)) return
      await read(next)
    }
  }
  finally { await holder.end().catch(() => {}) }
}
