import type { Database } from '../../../db/knex'
import { findUser, updateUser, type Notify } from '../../../db/repositories/users'
import { Refusal } from '../refusal'

/** What a person may see and change of their own account. */
export async function readAccount(db: Database, userId: number) {
  const user = await findUser(db, userId)
  if (!user) throw new Refusal(404, 'not_found', 'This account was not found.')
  return { id: user.id, email: user.email, name: user.name, role: user.role, notify: user.notify }
}

export async function changeAccount(db: Database, userId: number, change: { name?: string, notify?: Notify }) {
  await updateUser(db, userId, change)
  return await readAccount(db, userId)
}
