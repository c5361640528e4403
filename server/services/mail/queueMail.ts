import type { Database } from '../../../db/knex'
import { insertMail, type NewMail } from '../../../db/repositories/mails'

/**
 * Puts a mail in the queue, in the caller's transaction: it goes out only if that commits. `key` names the occasion and
 * is unique for ever, so that a handler that runs twice sends once. Answers whether it is new.
 */
export async function queueMail(db: Database, mail: NewMail): Promise<boolean> {
  return await insertMail(db, mail)
}
