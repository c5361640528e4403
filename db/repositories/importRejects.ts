import type { Database } from '../knex'

export interface RejectRow { line: number, column: string, cell: string, reason: string }

// PostgreSQL text cannot hold NUL
const clean = (text: string) => text.replaceAll('\0', '\uFFFD')

/** Replaces the rejects of an import. */
export async function writeRejects(db: Database, importId: number, rejects: RejectRow[]): Promise<void> {
  await db('import_rejects').where({ import_id: importId }).delete()
  for (let at = 0; at < rejects.length; at += 1000) {
    await db('import_rejects').insert(rejects.slice(at, at + 1000).map(r => ({ import_id: importId, line: r.line, column_name: clean(r.column), cell: clean(r.cell), reason: r.reason })))
  }
}

export async function listRejects(db: Database, importId: number, limit: number): Promise<RejectRow[]> {
  const rows = await db('import_rejects').where({ import_id: importId }).orderBy('line').limit(limit)
  return rows.map(r => ({ line: r.line, column: r.column_name, cell: r.cell, reason: r.reason }))
}
