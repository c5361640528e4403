import type { Database } from '../knex'

export type ImportStatus = 'received' | 'needsMapping' | 'reading' | 'assessing' | 'done' | 'failed'

export interface ImportRow {
  id: number
  name: string
  status: ImportStatus
  fileKey: string | null
  bytes: number
  sha256: string | null
  options: Record<string, unknown>
  mapping: Record<string, unknown> | null
  progress: number
  secondsLeft: number | null
  rows: number
  samples: number
  loops: number
  rejected: number
  missing: Record<string, number>
  changed: number
  weeks: string[]
  toAssess: number
  assessed: number
  attempts: number
  error: string | null
  receivedBy: string | null
  receivedAt: Date
  startedAt: Date | null
  finishedAt: Date | null
}

const columns = ['i.*', 'u.name as user_name', 't.name as token_name']
const joined = (db: Database) => db('imports as i').leftJoin('users as u', 'u.id', 'i.user_id').leftJoin('api_tokens as t', 't.id', 'i.token_id').select(columns)

const toImport = (r: Record<string, any>): ImportRow => ({
  id: r.id, name: r.name, status: r.status, fileKey: r.file_key, bytes: r.bytes, sha256: r.sha256, options: r.options, mapping: r.mapping,
  progress: r.progress, secondsLeft: r.seconds_left, rows: r.rows, samples: r.samples, loops: r.loops, rejected: r.rejected, missing: r.missing, changed: r.changed,
  weeks: r.weeks, toAssess: r.to_assess, assessed: r.assessed, attempts: r.attempts, error: r.error, receivedBy: r.user_name ?? r.token_name ?? null,
  receivedAt: r.received_at, startedAt: r.started_at, finishedAt: r.finished_at,
})

export interface NewImport { name: string, fileKey: string, bytes: number, sha256: string, idempotencyKey: string | null, options: Record<string, unknown>, userId: number | null, tokenId: number | null }

/** Null when the idempotency key is taken: then the import of that key is the answer. */
export async function insertImport(db: Database, i: NewImport): Promise<number | null> {
  const rows = await db('imports').insert({
    name: i.name, file_key: i.fileKey, bytes: i.bytes, sha256: i.sha256, idempotency_key: i.idempotencyKey, options: JSON.stringify(i.options), user_id: i.userId, token_id: i.tokenId,
  }).onConflict(db.raw('(idempotency_key) where idempotency_key is not null') as never).ignore().returning('id')
  return rows[0]?.id ?? null
}

export async function findImport(db: Database, id: number): Promise<ImportRow | null> {
  const row = await joined(db).where('i.id', id).first()
  return row ? toImport(row) : null
}

export async function findImportByKey(db: Database, idempotencyKey: string): Promise<ImportRow | null> {
  const row = await joined(db).where('i.idempotency_key', idempotencyKey).first()
  return row ? toImport(row) : null
}

export async function listImports(db: Database, { limit, offset }: { limit: number, offset: number }): Promise<{ total: number, rows: ImportRow[] }> {
  const [{ count }] = await db('imports').count()
  const rows = await joined(db).orderBy('i.id', 'desc').limit(limit).offset(offset)
  return { total: Number(count), rows: rows.map(toImport) }
}

/** The import to read next: in the order of arrival, because later uploads win. */
export async function findNextToRead(db: Database): Promise<ImportRow | null> {
  const row = await joined(db).whereIn('i.status', ['received', 'reading']).orderBy('i.id').first()
  return row ? toImport(row) : null
}

type Change = Partial<Pick<ImportRow, 'status' | 'progress' | 'secondsLeft' | 'rows' | 'samples' | 'loops' | 'rejected' | 'missing' | 'changed' | 'weeks' | 'toAssess' | 'assessed' | 'error' | 'mapping' | 'options' | 'startedAt' | 'finishedAt' | 'attempts'>>
const snake = (name: string) => name.replace(/[A-Z]/g, letter => `_${letter.toLowerCase()}`)

/** Changes an import and tells whoever listens. */
export async function updateImport(db: Database, id: number, change: Change): Promise<void> {
  const row = Object.fromEntries(Object.entries(change).map(([key, value]) => [snake(key), ['missing', 'mapping', 'options'].includes(key) && value !== null ? JSON.stringify(value) : value]))
  await db('imports').where({ id }).update(row)
  await notifyImport(db, id)
}

/** Counts assessed loop-weeks towards the imports that asked for them. */
export async function addAssessed(db: Database, counts: Map<number, number>): Promise<void> {
  for (const [id, n] of [...counts].sort((a, b) => a[0] - b[0])) {
    await db.raw(`update imports set assessed = assessed + :n, progress = least(0.99, 0.4 + 0.6 * (assessed + :n) / greatest(1, to_assess)),
      seconds_left = extract(epoch from now() - (mapping->>'assessingSince')::timestamptz) / (assessed + :n) * greatest(0, to_assess - assessed - :n) where id = :id`, { id, n })
    await notifyImport(db, id)
  }
}

/** Imports whose loop-weeks are all assessed and whose weeks are looked at become done. */
export async function finishImports(db: Database): Promise<number[]> {
  const { rows } = await db.raw(`
    update imports i set status = 'done', progress = 1, seconds_left = 0, finished_at = now()
    where status = 'assessing'
      and not exists (select from assessments_due d where d.import_ids @> array[i.id])
      and not exists (select from weeks_due w where w.week = any(i.weeks))
    returning id`)
  for (const { id } of rows) await notifyImport(db, id)
  return rows.map((r: { id: number }) => r.id)
}

/** Delivered when the transaction commits. */
export async function notifyImport(db: Database, id: number): Promise<void> {
  await db.raw(`select pg_notify('fettle_import', ?)`, [String(id)])
}

/** Files of finished imports older than a time: their samples are stored, the text is not needed again. */
export async function takeOldFiles(db: Database, before: Date): Promise<string[]> {
  const { rows } = await db.raw(`update imports set file_key = null from (select id, file_key as old from imports where status in ('done', 'failed') and file_key is not null and finished_at < ?) o where imports.id = o.id returning o.old as file`, [before])
  return rows.map((r: { file: string }) => r.file)
}
