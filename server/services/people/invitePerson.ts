import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findUser, insertUser } from '../../../db/repositories/users'
import type { Caller, Role } from '../../../shared/types/people'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'
import { mailLink } from './links'

type By = Pick<Caller, 'userId' | 'name'>

/** Makes an account without a password and mails the link that sets one. */
export async function invitePerson(db: Knex, input: { email: string, name: string, role: Role }, { by, publicUrl, now = new Date() }: { by: By, publicUrl: string, now?: Date }): Promise<{ id: number }> {
  return await db.transaction(async (trx) => {
    const id = await insertUser(trx, { ...input, passwordHash: null })
    if (id === null) throw new Refusal(409, 'already_exists', `${input.email} has an account already.`)
    await mailLink(trx, { user: { id, email: input.email, name: input.name }, purpose: 'invitation', publicUrl, siteName: (await getSettings(trx)).siteName, by: by.name, now })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'person.invite', entity: 'person', entityId: id, data: { email: input.email, role: input.role } })
    return { id }
  })
}

/** A new link for somebody invited whose first one ran out. */
export async function inviteAgain(db: Knex, id: number, { by, publicUrl, now = new Date() }: { by: By, publicUrl: string, now?: Date }): Promise<void> {
  await db.transaction(async (trx) => {
    const user = await findUser(trx, id)
    if (!user) throw new Refusal(404, 'not_found', 'This person was not found.')
    if (user.passwordHash !== null || user.disabledAt) throw new Refusal(409, 'not_invited', 'Only somebody who has not set a password yet can be invited again.')
    await mailLink(trx, { user, purpose: 'invitation', publicUrl, siteName: (await getSettings(trx)).siteName, by: by.name, now })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'person.inviteAgain', entity: 'person', entityId: id })
  })
}
