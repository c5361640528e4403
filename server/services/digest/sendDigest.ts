import type { Knex } from 'knex'
import { findDigest, listSubscribers, lockDigest, saveDigest } from '../../../db/repositories/digests'
import { insertAudit } from '../../../db/repositories/audit'
import { renderDigest } from '../../../shared/digest/renderDigest'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { queueMail } from '../mail/queueMail'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'
import { buildDigest } from './buildDigest'

export const unsubscribeUrl = (publicUrl: string, token: string) => `${publicUrl}/u/${token}`

export interface SendInput { week: string, dueAt: Date, publicUrl: string, now: Date, by: { userId: number | null, name: string }, /** leave it when it was made before */ once?: boolean }

/**
 * Queues the digest of a week for each subscriber, all in one transaction that only one sender at a time may hold: a
 * crash in the middle leaves nothing, the next try everything. The key of each mail is its person and week, so that a
 * second press of the button reaches only people who subscribed since. Answers how many mails were new.
 */
export async function sendDigest(db: Knex, { week, dueAt, publicUrl, now, by, once = false }: SendInput): Promise<{ recipients: number, queued: number }> {
  const edges = weekFrame(week, (await getSettings(db)).zone).hourEdges
  // the one mail of that week would be spent on half of it
  if (edges[edges.length - 1]! > now.getTime()) throw new Refusal(409, 'week_not_over', 'This week is not over yet; its digest can be sent from Monday on.')
  return db.transaction(async (trx) => {
    if (!await lockDigest(trx, week)) throw new Refusal(409, 'busy', 'This digest is being sent at this moment.')
    const subscribers = await listSubscribers(trx)
    if (once && (await findDigest(trx, week))?.madeAt) return { recipients: subscribers.length, queued: 0 }
    const models = new Map<string, Awaited<ReturnType<typeof buildDigest>>>()
    let queued = 0
    for (const person of subscribers) {
      const areas = [...person.areaIds].sort((a, b) => a - b)
      const model = models.get(areas.join()) ?? await buildDigest(trx, { week, areaIds: areas, publicUrl, now })
      models.set(areas.join(), model)
      const url = unsubscribeUrl(publicUrl, person.unsubscribeToken)
      const { subject, text, html } = renderDigest(model, url)
      // RFC 8058: the address takes a POST without cookie; a GET only asks. Kept short, because a folded header breaks DKIM.
      const fresh = await queueMail(trx, {
        key: `digest/${week}/${person.userId}`, kind: 'digest', userId: person.userId, recipient: person.email, subject, text, html,
        headers: { 'List-Unsubscribe': `<${url}>`, 'List-Unsubscribe-Post': 'List-Unsubscribe=One-Click' },
      })
      if (fresh) queued++
    }
    await saveDigest(trx, { week, dueAt, madeAt: now, madeBy: by.userId, recipients: subscribers.length })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'digest.send', entity: 'digest', entityId: week, data: { recipients: subscribers.length, queued } })
    return { recipients: subscribers.length, queued }
  })
}
