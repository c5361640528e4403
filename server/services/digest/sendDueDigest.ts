import type { Knex } from 'knex'
import { findDigest, readDigestReadiness } from '../../../db/repositories/digests'
import { previousWeek, weekOf } from '../../../shared/assessment/week/isoWeek'
import { digestDueAt } from '../../../shared/digest/digestDueAt'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'
import { sendDigest } from './sendDigest'

/** How long the digest waits for a week's data to come in and be assessed before it goes out as things stand. */
const PATIENCE_MS = 36 * 3_600_000

/**
 * Sends the digest that is owed, if any: of the last complete week, once its hour has come and its data are assessed.
 * Called every minute and at start, so that a system that was down at the hour sends it late rather than never; only
 * the latest week is made good, because nobody reads three digests at once.
 */
export async function sendDueDigest(db: Knex, { publicUrl, now }: { publicUrl: string, now: Date }): Promise<string | null> {
  const settings = await getSettings(db)
  const thisWeek = weekOf(now.getTime(), settings.zone)
  const week = previousWeek(thisWeek)
  const dueAt = new Date(digestDueAt(thisWeek, settings.zone, settings.digestWeekday, settings.digestHour))
  if (now < dueAt) return null
  if ((await findDigest(db, week))?.madeAt) return null
  const { waiting, assessed } = await readDigestReadiness(db, week)
  if ((waiting || !assessed) && now.getTime() < dueAt.getTime() + PATIENCE_MS) return null
  try { await sendDigest(db, { week, dueAt, publicUrl, now, by: { userId: null, name: 'Fettle' }, once: true }) }
  catch (error) {
    // another worker is at it
    if (error instanceof Refusal && error.data.code === 'busy') return null
    throw error
  }
  return week
}
