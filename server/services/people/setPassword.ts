import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { endLinksOf, findLink, useLink } from '../../../db/repositories/oneTimeLinks'
import { deleteSessionsOf } from '../../../db/repositories/sessions'
import { findUser, updateUser } from '../../../db/repositories/users'
import { Refusal } from '../refusal'
import { countOrRefuse, forgetAttempts } from './attempts'
import { linkHash } from './links'
import { hashPassword, verifyPassword } from './passwordHash'

const spent = () => new Refusal(404, 'link_spent', 'This link was used before, has run out or was never valid. Ask for a new one.')

/** Whose password a link sets, without using it up. */
export async function readLink(db: Knex, token: string, now = new Date()): Promise<{ email: string, name: string, purpose: 'invitation' | 'passwordReset' }> {
  const link = await findLink(db, linkHash(token), now)
  if (!link) throw spent()
  return { email: link.email, name: link.name, purpose: link.purpose }
}

/** Sets a password by a one-time link; whoever was signed in with the old one is out. Answers whose it was. */
export async function setPasswordByLink(db: Knex, { token, password }: { token: string, password: string }, now = new Date()): Promise<number> {
  const tokenHash = linkHash(token)
  if (!await findLink(db, tokenHash, now)) throw spent()
  const passwordHash = await hashPassword(password)
  return await db.transaction(async (trx) => {
    const link = await findLink(trx, tokenHash, now)
    if (!link || !await useLink(trx, tokenHash, now)) throw spent()
    await updateUser(trx, link.userId, { passwordHash })
    await endLinksOf(trx, link.userId, now)
    await deleteSessionsOf(trx, link.userId)
    await forgetAttempts(trx, `email ${link.email}`)
    await insertAudit(trx, { userId: link.userId, actor: link.name, action: 'person.setPassword', entity: 'person', entityId: link.userId, data: { by: link.purpose } })
    return link.userId
  })
}

/** Changes one's own password. All sessions end, the caller begins a new one. */
export async function changePassword(db: Knex, { userId, current, password }: { userId: number, current: string, password: string }, now = new Date()): Promise<void> {
  await countOrRefuse(db, `change ${userId}`, 10, now)
  const user = await findUser(db, userId)
  if (!user || !await verifyPassword(current, user.passwordHash)) throw new Refusal(422, 'invalid_input', 'The current password is not right.', { issues: [{ path: 'current', message: 'is not right' }] })
  const passwordHash = await hashPassword(password)
  await db.transaction(async (trx) => {
    await updateUser(trx, userId, { passwordHash })
    await endLinksOf(trx, userId, now)
    await deleteSessionsOf(trx, userId)
    await insertAudit(trx, { userId, actor: user.name, action: 'person.setPassword', entity: 'person', entityId: userId, data: { by: 'account' } })
  })
}
