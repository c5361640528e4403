import { createHash, randomBytes } from 'node:crypto'
import type { Database } from '../../db/knex'
import { deleteSession, findSessionPerson, insertSession, markSessionSeen } from '../../db/repositories/sessions'
import type { Person } from '../../shared/types/people'

const ABSOLUTE_LIMIT_MS = 14 * 24 * 3600 * 1000
const IDLE_LIMIT_MS = 3 * 24 * 3600 * 1000
const SEEN_EVERY_MS = 60_000

const hash = (id: string) => createHash('sha256').update(id).digest('hex')

/** A new session row; the answer is the id for the cookie, never stored in the clear. */
export async function beginSession(db: Database, userId: number, userAgent: string | undefined, now = new Date()): Promise<string> {
  const id = randomBytes(32).toString('base64url')
  await insertSession(db, { idHash: hash(id), userId, expiresAt: new Date(now.getTime() + ABSOLUTE_LIMIT_MS), userAgent: userAgent?.slice(0, 200) ?? null })
  return id
}

/** The person of a live session, or null: ended, too old, idle too long, the account is disabled, or a demo one without the demo. */
export async function touchSession(db: Database, id: string, { demo }: { demo: boolean }, now = new Date()): Promise<Person | null> {
  const found = await findSessionPerson(db, hash(id))
  if (!found || (found.demo && !demo) || found.expiresAt <= now || now.getTime() - found.lastSeenAt.getTime() > IDLE_LIMIT_MS) return null
  if (now.getTime() - found.lastSeenAt.getTime() > SEEN_EVERY_MS) await markSessionSeen(db, hash(id), now)
  return found.person
}

export async function endSession(db: Database, id: string): Promise<void> {
  await deleteSession(db, hash(id))
}
