import type { Database } from '../knex'

/** Attempts under an address (or another key) since a moment. */
export async function countAttempts(db: Database, key: string, since: Date): Promise<number> {
  return Number((await db('sign_in_attempts').where('email', key).where('at', '>', since).count('* as n'))[0]!.n)
}

export async function insertAttempt(db: Database, key: string, at: Date): Promise<void> {
  await db('sign_in_attempts').insert({ email: key, at })
}

export async function deleteAttempts(db: Database, key: string): Promise<void> {
  await db('sign_in_attempts').where('email', key).delete()
}

export async function deleteAttemptsBefore(db: Database, before: Date): Promise<void> {
  await db('sign_in_attempts').where('at', '<', before).delete()
}
