import type { Database } from '../knex'

type Scope = 'read' | 'import'

export async function insertToken(db: Database, t: { name: string, scopes: Scope[], createdBy: number | null, tokenHash: string }): Promise<number> {
  const [row] = await db('api_tokens').insert({ name: t.name, scopes: t.scopes, created_by: t.createdBy, token_hash: t.tokenHash }).returning('id')
  return row.id
}

export async function findToken(db: Database, tokenHash: string): Promise<{ id: number, name: string, scopes: Scope[] } | null> {
  const row = await db('api_tokens').where({ token_hash: tokenHash }).whereNull('revoked_at').first('id', 'name', 'scopes')
  return row ? { id: row.id, name: row.name, scopes: row.scopes } : null
}

export async function markTokenUsed(db: Database, id: number): Promise<void> {
  await db('api_tokens').where({ id }).update({ last_used_at: db.fn.now() })
}

export async function listTokens(db: Database) {
  const rows = await db('api_tokens as t').leftJoin('users as u', 'u.id', 't.created_by').orderBy('t.created_at', 'desc')
    .select('t.id', 't.name', 't.scopes', 't.created_at', 't.last_used_at', 't.revoked_at', 'u.name as maker')
  return rows.map(r => ({ id: r.id as number, name: r.name as string, scopes: r.scopes as Scope[], createdAt: r.created_at as Date, lastUsedAt: r.last_used_at as Date | null, revokedAt: r.revoked_at as Date | null, createdBy: r.maker as string | null }))
}

export async function revokeToken(db: Database, id: number): Promise<boolean> {
  return await db('api_tokens').where({ id }).whereNull('revoked_at').update({ revoked_at: db.fn.now() }) > 0
}
