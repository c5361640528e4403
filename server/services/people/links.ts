import { createHash, randomBytes } from 'node:crypto'
import type { Database } from '../../../db/knex'
import { insertLink, type LinkPurpose } from '../../../db/repositories/oneTimeLinks'
import type { User } from '../../../db/repositories/users'
import { queueMail } from '../mail/queueMail'

const HOURS: Record<LinkPurpose, number> = { invitation: 7 * 24, passwordReset: 2 }

export const linkHash = (token: string) => createHash('sha256').update(token).digest('hex')

/** Makes a one-time link and queues the mail that carries it. Only the hash of its token is kept. */
export async function mailLink(trx: Database, { user, purpose, publicUrl, siteName, by, now }: { user: Pick<User, 'id' | 'email' | 'name'>, purpose: LinkPurpose, publicUrl: string, siteName: string, by?: string, now: Date }): Promise<void> {
  const token = randomBytes(32).toString('base64url')
  const tokenHash = linkHash(token)
  await insertLink(trx, { tokenHash, userId: user.id, purpose, expiresAt: new Date(now.getTime() + HOURS[purpose] * 3600_000) })
  // After "#", because browsers never send that part: it stays out of access logs and referrers.
  const link = `${publicUrl}/set-password#${token}`
  const mail = purpose === 'invitation'
    ? { subject: `Your account at Fettle for ${siteName}`, text: `Hello ${user.name},\n\n${by} has made an account for you at Fettle, which keeps the control loops of ${siteName} in order.\nChoose your password here (the link works once, for seven days):\n\n${link}\n` }
    : { subject: 'A new password for Fettle', text: `Hello ${user.name},\n\nsomebody, probably you, asked for a new password for Fettle at ${siteName}.\nSet it here (the link works once, for two hours):\n\n${link}\n\nIf it was not you, do nothing: your password stays as it is.\n` }
  await queueMail(trx, { key: `${purpose}/${tokenHash.slice(0, 24)}`, kind: purpose, userId: user.id, recipient: user.email, ...mail })
}
