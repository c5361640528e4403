import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { endLinksOf } from '../../../db/repositories/oneTimeLinks'
import { deleteSessionsOf } from '../../../db/repositories/sessions'
import { findUser, lockActiveAdmins, updateUser } from '../../../db/repositories/users'
import type { Caller, Role } from '../../../shared/types/people'
import { Refusal } from '../refusal'

/** Name, role, disabled. Disabling ends every session and link at once; a changed role counts from the next request on. */
export async function changePerson(db: Knex, id: number, change: { name?: string, role?: Role, disabled?: boolean }, by: Pick<Caller, 'userId' | 'name'>, now = new Date()): Promise<void> {
  await db.transaction(async (trx) => {
    const admins = await lockActiveAdmins(trx)
    const user = await findUser(trx, id)
    if (!user) throw new Refusal(404, 'not_found', 'This person was not found.')
    const losesAdmin = admins.includes(id) && (change.disabled === true || (change.role !== undefined && change.role !== 'admin'))
    if (losesAdmin && admins.length === 1) throw new Refusal(409, 'last_admin', 'This is the only admin. Make somebody else admin first.')
    const disabledAt = change.disabled === undefined ? undefined : change.disabled ? user.disabledAt ?? now : null
    await updateUser(trx, id, { name: change.name, role: change.role, disabledAt })
    if (change.disabled) {
      await deleteSessionsOf(trx, id)
      await endLinksOf(trx, id, now)
    }
    const data: Record<string, unknown> = {}
    if (change.name !== undefined && change.name !== user.name) data.name = { from: user.name, to: change.name }
    if (change.role !== undefined && change.role !== user.role) data.role = { from: user.role, to: change.role }
    if (change.disabled !== undefined && change.disabled !== Boolean(user.disabledAt)) data.disabled = change.disabled
    if (Object.keys(data).length) await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'person.change', entity: 'person', entityId: id, data: { email: user.email, ...data } })
  })
}
