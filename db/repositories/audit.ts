import type { Database } from '../knex'

export interface AuditEntry { userId: number | null, actor: string, action: string, entity: string, entityId?: string | number | null, data?: Record<string, unknown> }

/** One row per change, written in the transaction of the change itself. */
export async function insertAudit(db: Database, e: AuditEntry): Promise<void> {
  await db('audit').insert({ user_id: e.userId, actor: e.actor, action: e.action, entity: e.entity, entity_id: e.entityId == null ? null : String(e.entityId), data: JSON.stringify(e.data ?? {}) })
}

export async function listAudit(db: Database, { limit = 100, before, entity }: { limit?: number, before?: number, entity?: string }) {
  const query = db('audit').orderBy('id', 'desc').limit(limit)
  if (before) query.where('id', '<', before)
  if (entity) query.where({ entity })
  const rows = await query
  return rows.map(r => ({ id: r.id as number, at: r.at as Date, actor: r.actor as string, action: r.action as string, entity: r.entity as string, entityId: r.entity_id as string | null, data: r.data as Record<string, unknown> }))
}
