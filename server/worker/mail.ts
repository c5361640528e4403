import type { Knex } from 'knex'
import { createTransport } from 'nodemailer'
import { deleteOldMails } from '../../db/repositories/mails'
import { catchMails } from '../services/mail/catchMails'
import { sendDueMails } from '../services/mail/sendDueMails'
import { getSettings } from '../services/settings'
import type { Environment } from '../services/environment'

const EVERY_MS = 2000
const DAY_MS = 86_400_000

/** Sends queued mail for as long as the worker lives; without SMTP_URL to our own catcher. Answers how to stop it. */
export async function startMail(db: Knex, environment: Environment): Promise<() => Promise<void>> {
  const catcher = environment.SMTP_URL ? null : await catchMails(db)
  // One conversation has to end well before another sender may take the mail over.
  const transport = createTransport({ url: environment.SMTP_URL ?? catcher!.url, connectionTimeout: 20_000, greetingTimeout: 20_000, socketTimeout: 60_000, ...(catcher ? { ignoreTLS: true } : {}) } as never)
  let stopped = false
  let wake = () => {}
  let cleaned = 0
  const loop = (async () => {
    while (!stopped) {
      try {
        await sendDueMails(db, transport, { from: environment.MAIL_FROM })
        if (Date.now() - cleaned > DAY_MS) {
          cleaned = Date.now()
          await deleteOldMails(db, new Date(cleaned - (await getSettings(db)).mailRetentionDays * DAY_MS))
        }
      }
      catch (error) {
        console.error('Mail:', (error as Error).message)
      }
      await new Promise<void>((resolve) => {
        const timer = setTimeout(resolve, EVERY_MS)
        wake = () => { clearTimeout(timer); resolve() }
      })
    }
  })()
  return async () => {
    stopped = true
    wake()
    await loop
    transport.close()
    await catcher?.close()
  }
}
