import type { AddressInfo } from 'node:net'
import PostalMime from 'postal-mime'
import { SMTPServer } from 'smtp-server'
import type { Database } from '../../../db/knex'
import { insertCaughtMail } from '../../../db/repositories/mails'

const SIZE_LIMIT_BYTES = 10 * 1024 * 1024

/** A mail server on loopback that keeps what it gets in the database, for sites and trials without one of their own. */
export async function catchMails(db: Database): Promise<{ url: string, close: () => Promise<void> }> {
  const server = new SMTPServer({
    authOptional: true, disabledCommands: ['AUTH', 'STARTTLS'], size: SIZE_LIMIT_BYTES, logger: false,
    onData(stream, session, done) {
      const chunks: Buffer[] = []
      stream.on('data', (chunk: Buffer) => chunks.push(chunk))
      stream.on('end', () => {
        const raw = Buffer.concat(chunks)
        const envelope = session.envelope
        PostalMime.parse(raw)
          .then(({ subject }) => insertCaughtMail(db, { from: envelope.mailFrom ? envelope.mailFrom.address : '', to: envelope.rcptTo.map(a => a.address), subject: subject ?? '', raw }))
          .then(() => done(), done)
      })
    },
  })
  server.on('error', () => { /* a client that hangs up is no concern of ours */ })
  await new Promise<void>((resolve, reject) => {
    server.server.once('error', reject)
    server.listen(0, '127.0.0.1', () => resolve())
  })
  const { port } = server.server.address() as AddressInfo
  return { url: `smtp://127.0.0.1:${port}`, close: () => new Promise(resolve => server.close(() => resolve())) }
}
