import { createHash } from 'node:crypto'
import type { Transporter } from 'nodemailer'
import type { Database } from '../../../db/knex'
import { settleMail, takeDueMail, type DueMail } from '../../../db/repositories/mails'

const MINUTE_MS = 60_000
/** Waits between attempts; after the last one the mail has failed and an admin sees it. */
const WAITS_MS = [1, 5, 15, 60, 240, 720].map(minutes => minutes * MINUTE_MS)
/** Longer than any conversation with a server may take (see createTransport). */
const TAKE_OVER_MS = 5 * MINUTE_MS

/** A refusal that no repetition changes: the server's 5xx answer to this address or this mail (RFC 5321, 4.2.1). */
const isFinal = (error: { responseCode?: number, code?: string }) => (error.responseCode ?? 0) >= 500 && error.code !== 'EAUTH'

/**
 * Sends every mail that is due, one after another, and answers how many went out.
 *
 * A sender that dies between the server's acceptance and our note of it leaves the mail in `sending`; it is sent again
 * after five minutes with the same Message-ID, by which mail servers and readers drop a double.
 */
export async function sendDueMails(db: Database, transport: Pick<Transporter, 'sendMail'>, { from, clock = () => new Date() }: { from: string, clock?: () => Date }): Promise<number> {
  let sent = 0
  for (;;) {
    const mail = await takeDueMail(db, clock(), new Date(clock().getTime() + TAKE_OVER_MS))
    if (!mail) return sent
    if (mail.attempts > WAITS_MS.length + 1) {
      await settleMail(db, mail, { status: 'failed', error: 'The sender ended in the middle of each attempt.' })
      continue
    }
    try {
      await transport.sendMail({ from, to: mail.recipient, subject: mail.subject, text: mail.text, html: mail.html ?? undefined, headers: mail.headers, messageId: messageId(mail, from) })
      await settleMail(db, mail, { status: 'sent', sentAt: clock() })
      sent++
    }
    catch (error) {
      const { message } = error as Error
      const wait = WAITS_MS[mail.attempts - 1]
      if (wait === undefined || isFinal(error as { responseCode?: number })) await settleMail(db, mail, { status: 'failed', error: message })
      else await settleMail(db, mail, { status: 'waiting', error: message, nextAttemptAt: new Date(clock().getTime() + wait) })
    }
  }
}

function messageId(mail: DueMail, from: string): string {
  const domain = /@([^\s>]+)/.exec(from)?.[1] ?? 'localhost'
  return `<${createHash('sha256').update(mail.key).digest('hex').slice(0, 32)}@${domain}>`
}
