import type { AddressInfo } from 'node:net'
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
        insertCaughtMail(db, {
          from: envelope.mailFrom ? envelope.mailFrom.address : '', to: envelope.rcptTo.map(a => a.address),
          subject: readSubject(raw), raw,
        }).then(() => done(), done)
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

/** Subject header, unfolded, with RFC 2047 words decoded. */
function readSubject(raw: Buffer): string {
  const head = raw.toString('latin1').split(/\r?\n\r?\n/, 1)[0]!.replace(/\r?\n[ \t]+/g, ' ')
  const value = /^subject:\s*(.*)$/im.exec(head)?.[1] ?? ''
  return value.replace(/(\?=)\s+(=\?)/g, '$1$2').replace(/=\?([^?]+)\?([bq])\?([^?]*)\?=/gi, (_, charset: string, kind: string, text: string) => {
    const bytes = kind.toLowerCase() === 'b' ? Buffer.from(text, 'base64') : Buffer.from(text.replace(/_/g, ' ').replace(/=([0-9a-f]{2})/gi, (__, hex: string) => String.fromCharCode(Number.parseInt(hex, 16))), 'latin1')
    return bytes.toString(/utf-?8/i.test(charset) ? 'utf8' : 'latin1')
  })
}
