import { randomBytes } from 'node:crypto'
import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { endSubscription, findSubscription, listAreaNames, listDigestMails, listSubscribers, saveSubscription } from '../../../db/repositories/digests'
import { nextWeek, weekOf } from '../../../shared/assessment/week/isoWeek'
import { digestDueAt } from '../../../shared/digest/digestDueAt'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'

export interface Subscription { active: boolean, areaIds: number[] }

export async function readSubscription(db: Knex, userId: number): Promise<Subscription> {
  return await findSubscription(db, userId) ?? { active: false, areaIds: [] }
}

export async function changeSubscription(db: Knex, by: { userId: number, name: string }, input: Subscription): Promise<Subscription> {
  return db.transaction(async (trx) => {
    if ((await listAreaNames(trx, input.areaIds)).length !== new Set(input.areaIds).size) throw new Refusal(422, 'invalid_input', 'One of these areas does not exist any more.', { issues: [{ path: 'areaIds', message: 'unknown' }] })
    await saveSubscription(trx, { userId: by.userId, ...input, token: randomBytes(9).toString('base64url') })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'digest.subscription', entity: 'person', entityId: by.userId, data: { ...input } })
    return input
  })
}

/** From the link in a mail: whoever holds it may end this one subscription and nothing else. */
export async function unsubscribe(db: Knex, token: string): Promise<void> {
  await db.transaction(async (trx) => {
    const userId = await endSubscription(trx, token)
    if (userId === null) throw new Refusal(404, 'not_found', 'This address is not known; perhaps the subscription was made anew.')
    await insertAudit(trx, { userId, actor: 'link in the digest', action: 'digest.unsubscribe', entity: 'person', entityId: userId })
  })
}

/** Who gets the digest, when the next one is due, and what became of those that were sent. */
export async function digestOverview(db: Knex, now = new Date()) {
  const settings = await getSettings(db)
  const [mails, subscribers] = await Promise.all([listDigestMails(db), listSubscribers(db)])
  const thisWeek = weekOf(now.getTime(), settings.zone)
  const dueIn = (week: string) => digestDueAt(week, settings.zone, settings.digestWeekday, settings.digestHour)
  const nextDue = dueIn(thisWeek) > now.getTime() ? dueIn(thisWeek) : dueIn(nextWeek(thisWeek))
  const names = new Map<string, string[]>()
  for (const s of subscribers) names.set(s.areaIds.join(), names.get(s.areaIds.join()) ?? await listAreaNames(db, s.areaIds))
  return {
    mails, nextDueAt: new Date(nextDue).toISOString(), zone: settings.zone, weekday: settings.digestWeekday, hour: settings.digestHour,
    subscribers: subscribers.map(s => ({ userId: s.userId, name: s.name, email: s.email, areas: names.get(s.areaIds.join()) ?? [] })),
  }
}
