import PostalMime from 'postal-mime'
import type { Database } from '../../../db/knex'
import { findCaughtMail } from '../../../db/repositories/mails'

/** A caught mail for reading; `html` is for a sandboxed frame only. */
export async function readCaughtMail(db: Database, id: number): Promise<{ id: number, from: string, to: string[], subject: string, receivedAt: Date, text: string, html: string | null } | null> {
  const mail = await findCaughtMail(db, id)
  if (!mail) return null
  const { text, html } = await PostalMime.parse(mail.raw)
  return { id: mail.id, from: mail.from, to: mail.to, subject: mail.subject, receivedAt: mail.receivedAt, text: text ?? '', html: html ?? null }
}
