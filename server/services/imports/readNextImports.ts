import pg from 'pg'
import type { Knex } from 'knex'
import { findNextToRead } from '../../../db/repositories/imports'

/** Any number; the same in every worker. */
const READING_LOCK = 7_340_111

/**
 * Reads waiting uploads one after another, in the order of their arrival: later uploads win sample by sample, so two
 * may not be read at once. The lock lives in a connection of its own; when the worker is killed the server drops it,
 * and another worker takes the upload up from its beginning.
 */
export async function readNextImports(db: Knex, databaseUrl: string, read: (importId: number) => Promise<void>, stopped: () => boolean): Promise<void> {
  if (!await findNextToRead(db)) return
  const holder = new pg.Client({ connectionString: databaseUrl, application_name: 'fettle-reading-lock', keepAlive: true })
  let lost = false
  holder.on('error', () => { lost = true })
  await holder.connect()
  try {
    const { rows } = await holder.query('select pg_try_advisory_lock($1) as mine', [READING_LOCK])
    if (!rows[0].mine) return
    while (!stopped() && !lost) {
      const next = await findNextToRead(db)
      if (!next) return
      await read(next.id)
    }
  }
  finally { await holder.end().catch(() => {}) }
}
