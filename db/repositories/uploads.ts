import type { Database } from '../knex'

export interface UploadRow { id: string, userId: number, length: number, received: number, metadata: Record<string, string>, importId: number | null, createdAt: Date }

const toUpload = (r: Record<string, any>): UploadRow => ({ id: r.id, userId: r.user_id, length: r.length, received: r.received, metadata: r.metadata, importId: r.import_id, createdAt: r.created_at })

export async function insertUpload(db: Database, u: { id: string, userId: number, length: number, metadata: Record<string, string> }): Promise<void> {
  await db('uploads').insert({ id: u.id, user_id: u.userId, length: u.length, metadata: JSON.stringify(u.metadata) })
}

export async function findUpload(db: Database, id: string, userId: number): Promise<UploadRow | null> {
  const row = await db('uploads').where({ id, user_id: userId }).first()
  return row ? toUpload(row) : null
}

export async function updateUpload(db: Database, id: string, change: { received?: number, importId?: number }): Promise<void> {
  await db('uploads').where({ id }).update({ ...(change.received === undefined ? {} : { received: change.received }), ...(change.importId === undefined ? {} : { import_id: change.importId }) })
}

export async function deleteUpload(db: Database, id: string): Promise<void> {
  await db('uploads').where({ id }).delete()
}

/** Uploads that nobody went on with. */
export async function takeStaleUploads(db: Database, before: Date): Promise<string[]> {
  return (await db('uploads').where('created_at', '<', before).delete().returning('id')).map(r => r.id)
}
