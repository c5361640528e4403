import type { Knex } from 'knex'
import { listOverdueTickets } from '../../../db/repositories/tickets'
import { dayIn } from '../../../shared/format/dayIn'
import { getSettings } from '../settings'
import { notifyOverdue } from './notifications'

/**
 * One mail for each ticket and due date that has passed, to the person who holds it, else to the one who opened it.
 * Called every minute; the key of the mail keeps it to one. Not before the hour of the digest, because nobody wants it
 * at midnight.
 */
export async function remindOverdue(db: Knex, now: Date): Promise<void> {
  const { zone, digestHour } = await getSettings(db)
  const hour = Number(new Intl.DateTimeFormat('en-GB', { timeZone: zone, hour: '2-digit', hourCycle: 'h23' }).format(now))
  if (hour < digestHour) return
  for (const t of await listOverdueTickets(db, dayIn(zone, now))) {
    const userId = t.assigneeId ?? t.openedBy
    if (userId !== null) await notifyOverdue(db, { ticketId: t.id, title: t.title, dueOn: t.dueOn, userId })
  }
}
