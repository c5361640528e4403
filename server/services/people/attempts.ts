import type { Database } from '../../../db/knex'
import { countAttempts, deleteAttempts, deleteAttemptsBefore, insertAttempt } from '../../../db/repositories/signInAttempts'
import { Refusal } from '../refusal'

const WINDOW_MS = 15 * 60_000
const KEEP_MS = 24 * 3600_000

/**
 * Counts one attempt under a key and refuses beyond the limit: 429 with the wait. The attempt is written before the
 * costly check, so that many at once cannot slip through together.
 */
export async function countOrRefuse(db: Database, key: string, limit: number, now: Date): Promise<void> {
  const id = key.toLowerCase().slice(0, 300)
  await insertAttempt(db, id, now)
  if (await countAttempts(db, id, new Date(now.getTime() - WINDOW_MS)) > limit) {
    throw new Refusal(429, 'too_many_attempts', 'There were too many attempts. Please wait 15 minutes, or set a new password by mail.', { retryAfter: WINDOW_MS / 1000 })
  }
  // cheap enough to do on the way, and nobody has to remember it
  if (now.getMilliseconds() < 50) await deleteAttemptsBefore(db, new Date(now.getTime() - KEEP_MS))
}

export async function forgetAttempts(db: Database, key: string): Promise<void> {
  await deleteAttempts(db, key.toLowerCase().slice(0, 300))
}
