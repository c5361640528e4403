import type { Database } from '../knex'

export type LinkPurpose = 'invitation' | 'passwordReset'

export async function insertLink(db: Database, l: { tokenHash: string, userId: number, purpose: LinkPurpose, expiresAt: Date }): Promise<void> {
  await db('one_time_links').insert({ token_hash: l.tokenHash, user_id: l.userId, purpose: l.purpose, expires_at: l.expiresAt })
}

export async function findLink(db: Database, tokenHash: string, now: Date): Promise<{ userId: number, purpose: LinkPurpose, email: string, name: string } | null> {
  const row = await db('one_time_links as l').join('users as u', 'u.id', 'l.user_id').where('l.token_hash', tokenHash)
    .whereNull('l.used_at').where('l.expires_at', '>', now).whereNull('u.disabled_at').first('l.user_id', 'l.purpose', 'u.email', 'u.name')
  return row ? { userId: row.user_id, purpose: row.purpose, email: row.email, name: row.name } : null
}

/** Uses a link up; false when somebody else was quicker. */
export async function useLink(db: Database, tokenHash: string, now: Date): Promise<boolean> {
  return await db('one_time_links').where({ token_hash: tokenHash }).whereNull('used_at').where('expires_at', '>', now).update({ used_at: now }) > 0
}

/** Ends all links of a person: after a password was set, older mails must not set it again. */
export async function endLinksOf(db: Database, userId: number, now: Date): Promise<void> {
  await db('one_time_links').where({ user_id: userId }).whereNull('used_at').update({ used_at: now })
}
