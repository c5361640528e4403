import type { Database } from '../knex'

export interface NewMail { key: string, kind: string, userId: number | null, recipient: string, subject: string, text: string, html?: string | null, headers?: Record<string, string> }
export interface DueMail extends NewMail { id: number, attempts: number }
export type MailStatus = 'waiting' | 'sending' | 'sent' | 'failed'

/** Now, to the millisecond: the sender's clock has no finer grain, and would find a mail queued in its own millisecond not due yet. */
const atOnce = (db: Database) => db.raw('date_trunc(\'milliseconds\', now())')

/** False when a mail of this key was queued before. */
export async function insertMail(db: Database, m: NewMail): Promise<boolean> {
  const rows = await db('mails').insert({ key: m.key, kind: m.kind, user_id: m.userId, recipient: m.recipient, subject: m.subject, text: m.text, html: m.html ?? null, headers: JSON.stringify(m.headers ?? {}), next_attempt_at: atOnce(db) })
    .onConflict('key').ignore().returning('id')
  return rows.length > 0
}

/**
 * Takes the next due mail for one sender. While it is out, `next_attempt_at` is the moment at which another sender may
 * take it over, which only happens when this one died.
 */
export async function takeDueMail(db: Database, now: Date, takeOverAt: Date): Promise<DueMail | null> {
  const { rows } = await db.raw(`
    update mails set status = 'sending', attempts = attempts + 1, next_attempt_at = :takeOverAt
    where id = (
      select id from mails where status in ('waiting', 'sending') and next_attempt_at <= :now
      order by next_attempt_at, id limit 1 for update skip locked
    )
    returning id, key, kind, user_id as "userId", recipient, subject, text, html, headers, attempts`, { now, takeOverAt })
  return rows[0] ?? null
}

/** Only the sender that holds this attempt may say how it went. */
export async function settleMail(db: Database, { id, attempts }: { id: number, attempts: number }, outcome: { status: MailStatus, error?: string | null, nextAttemptAt?: Date, sentAt?: Date }): Promise<boolean> {
  const row: Record<string, unknown> = { status: outcome.status, error: outcome.error ?? null }
  if (outcome.nextAttemptAt) row.next_attempt_at = outcome.nextAttemptAt
  if (outcome.sentAt) row.sent_at = outcome.sentAt
  return await db('mails').where({ id, attempts, status: 'sending' }).update(row) > 0
}

export async function listMails(db: Database, { status, limit = 100 }: { status?: MailStatus, limit?: number } = {}) {
  const query = db('mails').orderBy('id', 'desc').limit(limit).select('id', 'kind', 'recipient', 'subject', 'status', 'attempts', 'error', 'created_at', 'sent_at', 'next_attempt_at')
  if (status) query.where({ status })
  return (await query).map(r => ({ id: r.id as number, kind: r.kind as string, recipient: r.recipient as string, subject: r.subject as string, status: r.status as MailStatus, attempts: r.attempts as number, error: r.error as string | null, createdAt: r.created_at as Date, sentAt: r.sent_at as Date | null, nextAttemptAt: r.next_attempt_at as Date }))
}

export async function retryFailedMail(db: Database, id: number): Promise<boolean> {
  return await db('mails').where({ id, status: 'failed' }).update({ status: 'waiting', attempts: 0, next_attempt_at: atOnce(db), error: null }) > 0
}

export async function insertCaughtMail(db: Database, m: { from: string, to: string[], subject: string, raw: Buffer }): Promise<void> {
  await db('caught_mails').insert({ mail_from: m.from, rcpt_to: m.to, subject: m.subject, raw: m.raw })
}

export async function listCaughtMails(db: Database, limit = 100) {
  const rows = await db('caught_mails').orderBy('id', 'desc').limit(limit).select('id', 'mail_from', 'rcpt_to', 'subject', 'received_at')
  return rows.map(r => ({ id: r.id as number, from: r.mail_from as string, to: r.rcpt_to as string[], subject: r.subject as string, receivedAt: r.received_at as Date }))
}

export async function findCaughtMail(db: Database, id: number): Promise<{ id: number, from: string, to: string[], subject: string, receivedAt: Date, raw: Buffer } | null> {
  const r = await db('caught_mails').where({ id }).first()
  return r ? { id: r.id, from: r.mail_from, to: r.rcpt_to, subject: r.subject, receivedAt: r.received_at, raw: r.raw } : null
}

/** What is neither waiting nor news any more. */
export async function deleteOldMails(db: Database, before: Date): Promise<void> {
  await db('mails').whereIn('status', ['sent', 'failed']).where('created_at', '<', before).delete()
  await db('caught_mails').where('received_at', '<', before).delete()
}
