import type { Database } from '../../../db/knex'
import { findUser } from '../../../db/repositories/users'
import { countTicketEvents, listWatchers } from '../../../db/repositories/tickets'
import { queueMail } from '../mail/queueMail'
import type { Actor } from './caller'

const link = (ticketId: number) => `${(process.env.PUBLIC_URL ?? `http://${process.env.HOST ?? '127.0.0.1'}:${process.env.PORT ?? 3000}`).replace(/\/$/, '')}/tickets/${ticketId}`

async function send(trx: Database, userId: number, preference: 'assignment' | 'handBack' | 'overdue', mail: { key: string, subject: string, text: string }): Promise<void> {
  const person = await findUser(trx, userId)
  if (!person || person.disabledAt || person.notify[preference] === false) return
  await queueMail(trx, { key: mail.key, kind: preference, userId, recipient: person.email, subject: mail.subject, text: `${mail.text}\n\nYou can turn these mails off in your account.\n` })
}

export async function notifyAssignment(trx: Database, { ticketId, title, assigneeId, by }: { ticketId: number, title: string, assigneeId: number, by: Actor }): Promise<void> {
  if (assigneeId === by.userId) return
  // The history row of the assignment is new each time, so the count of them makes the key unique per assignment.
  const count = await countTicketEvents(trx, ticketId)
  await send(trx, assigneeId, 'assignment', { key: `assignment-${ticketId}-${assigneeId}-${count}`, subject: `Ticket ${ticketId} is yours: ${title}`, text: `${by.name} assigned ticket ${ticketId} to you.\n${title}\n\n${link(ticketId)}` })
}

export async function notifyHandBack(trx: Database, { ticketId, title, openedBy, by }: { ticketId: number, title: string, openedBy: number | null, by: Actor }): Promise<void> {
  const watchers = await listWatchers(trx, ticketId)
  const people = new Set([...watchers.map(w => w.id), ...(openedBy ? [openedBy] : [])])
  const count = await countTicketEvents(trx, ticketId)
  for (const userId of people) {
    if (userId === by.userId) continue
    await send(trx, userId, 'handBack', { key: `handBack-${ticketId}-${userId}-${count}`, subject: `Ticket ${ticketId} is ready to verify: ${title}`, text: `${by.name} has finished the work on ticket ${ticketId} and hands it back.\n${title}\n\n${link(ticketId)}` })
  }
}

/** Back from verification to the person who did the work. */
export async function notifySentBack(trx: Database, { ticketId, title, assigneeId, reason, by }: { ticketId: number, title: string, assigneeId: number | null, reason: string, by: Actor }): Promise<void> {
  if (assigneeId === null || assigneeId === by.userId) return
  const count = await countTicketEvents(trx, ticketId)
  await send(trx, assigneeId, 'handBack', { key: `sentBack-${ticketId}-${assigneeId}-${count}`, subject: `Ticket ${ticketId} is back with you: ${title}`, text: `${by.name} sent ticket ${ticketId} back to work.\n${title}\n\n${reason}\n\n${link(ticketId)}` })
}

export async function notifyOverdue(trx: Database, { ticketId, title, dueOn, userId }: { ticketId: number, title: string, dueOn: string, userId: number }): Promise<void> {
  await send(trx, userId, 'overdue', { key: `overdue-${ticketId}-${dueOn}-${userId}`, subject: `Ticket ${ticketId} is overdue: ${title}`, text: `Ticket ${ticketId} was due on ${dueOn} and is not done.\n${title}\n\n${link(ticketId)}` })
}

export async function notifySlideBack(trx: Database, { ticketId, followUpId, title, people }: { ticketId: number, followUpId: number, title: string, people: number[] }): Promise<void> {
  for (const userId of new Set(people)) {
    await send(trx, userId, 'handBack', { key: `slideBack-${ticketId}-${userId}`, subject: `Slid back after ticket ${ticketId}: ${title}`, text: `A loop of ticket ${ticketId}, which you closed or worked on, has become worse again. Ticket ${followUpId} was opened as a follow-up.\n\n${link(followUpId)}` })
  }
}
