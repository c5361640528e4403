import type { Knex } from 'knex'
import { listSubscribers, saveDigest } from '../../../db/repositories/digests'
import { insertAudit } from '../../../db/repositories/audit'
import { renderDigest } from '../../../shared/digest/renderDigest'
import { queueMail } from '../mail/queueMail'
import { buildDigest } from './buildDigest'

export const unsubscribeUrl = (publicUrl: string, token: string) => `${publicUrl}/u/${token}`

/**
 * Queues the digest of a week for each subscriber. The key of each mail is its person and week, so that a crash in the
 * middle, a second worker or a second press of the button sends nobody a second one. Answers how many were new.
 */
export async function sendDigest(db: Knex, { week, dueAt, publicUrl, now, by }: { week: string, dueAt: Date, publicUrl: string, now: Date, by: { userId: number | null, name: string } }): Promise<{ recipients: number, queued: number }> {
  const subscribers = await listSubscribers(db)
  let queued = 0
  for (const person of subscribers) {
    const model = await buildDigest(db, { week, areaIds: person.areaIds, publicUrl, now })
    const url = unsubscribeUrl(publicUrl, person.unsubscribeToken)
    const { subject, text, html } = renderDigest(model, url)
    // RFC 8058: the address takes a POST without cookie; a GET only asks. Kept short, because a folded header breaks DKIM.
    const fresh = await queueMail(db, {
      key: `digest/${week}/${person.userId}`, kind: 'digest', userId: person.userId, recipient: person.email, subject, text, html,
      headers: { 'List-Unsubscribe': `<${url}>`, 'List-Unsubscribe-Post': 'List-Unsubscribe=One-Click' },
    })
    if (fresh) queued++
  }
  await db.transaction(async (trx) => {
    await saveDigest(trx, { week, dueAt, madeAt: now, madeBy: by.userId, recipients: subscribers.length })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'digest.send', entity: 'digest', entityId: week, data: { recipients: subscribers.length, queued } })
  })
  return { recipients: subscribers.length, queued }
}
