import type { Knex } from 'knex'
import { findDigest } from '../../../db/repositories/digests'
import { previousWeek, weekOf } from '../../../shared/assessment/week/isoWeek'
import { digestDueAt } from '../../../shared/digest/digestDueAt'
import { getSettings } from '../settings'
import { sendDigest } from './sendDigest'

/**
 * Sends the digest that is owed, if any: of the last complete week, once its hour has come. Called every minute and at
 * start, so that a system that was down at the hour sends it late rather than never; only the latest week is made good,
 * because nobody reads three digests at once.
 */
export async function sendDueDigest(db: Knex, { publicUrl, now }: { publicUrl: string, now: Date }): Promise<string | null> {
  const settings = await getSettings(db)
  const thisWeek = weekOf(now.getTime(), settings.zone)
  const week = previousWeek(thisWeek)
  const dueAt = new Date(digestDueAt(thisWeek, settings.zone, settings.digestWeekday, settings.digestHour))
  if (now < dueAt) return null
  const made = await findDigest(db, week)
  if (made?.madeAt) return null
  await sendDigest(db, { week, dueAt, publicUrl, now, by: { userId: null, name: 'Fettle' } })
  return week
}
