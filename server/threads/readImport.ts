import { openDatabase } from '../../db/knex'
import { readImport } from '../services/imports/readImport'

/** One upload, read in a thread with connections of its own, so that the worker's own loop stays free. */
export default async function read({ databaseUrl, importId, dataDir }: { databaseUrl: string, importId: number, dataDir: string }): Promise<void> {
  const db = openDatabase(databaseUrl, { poolSize: 2, name: 'fettle-reader' })
  try { await readImport(db, importId, { dataDir }) }
  finally { await db.destroy() }
}
