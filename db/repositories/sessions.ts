import type { Database } from '../knex'
import type { Person, Role } from '../../shared/types/people'

export async function insertSession(db: Database, s: { idHash: string, userId: number, expiresAt: Date, userAgent: string | null }): Promise<void> {
  await db('sessions').insert({ id_hash: s.idHash, user_id: s.userId, expires_at: s.expiresAt, user_agent: s.userAgent })
}

export async function findSessionPerson(db: Database, idHash: string): Promise<{ person: Person, demo: boolean, expiresAt: Date, lastSeenAt: Date } | null> {
  const row = await db('sessions as s').join('users as u', 'u.id', 's.user_id').where('s.id_hash', idHash).whereNull('u.disabled_at')
    .first('u.id', 'u.email', 'u.name', 'u.role', 'u.demo', 's.expires_at', 's.last_seen_at')
  if (!row) return null
  return { person: { id: row.id, email: row.email, name: row.name, role: row.role as Role }, demo: row.demo, expiresAt: row.expires_at, lastSeenAt: row.last_seen_at }
}

export async function markSessionSeen(db: Database, idHash: string, now: Date): Promise<void> {
  await db('sessions').where('id_hash', idHash).update({ last_seen_at: now })
}

export async function deleteSession(db: Database, idHash: string): Promise<void> {
  await db('sessions').where('id_hash', idHash).delete()
}

export async function deleteSessionsOf(db: Database, userId: number): Promise<void> {
  await db('sessions').where('user_id', userId).delete()
}
