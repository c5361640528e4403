import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { countAccounts, insertUser } from '../../../db/repositories/users'
import { hashPassword } from './passwordHash'

/** The first account of a site, from the environment. Once there is one, these settings do nothing: they are no back door. */
export async function ensureFirstAdmin(db: Knex, email: string, password: string): Promise<boolean> {
  if (await countAccounts(db, { withDemo: false }) > 0) return false
  const passwordHash = await hashPassword(password)
  return await db.transaction(async (trx) => {
    const id = await insertUser(trx, { email, name: email.split('@')[0]!, role: 'admin', passwordHash })
    if (id === null) return false
    await insertAudit(trx, { userId: null, actor: 'start', action: 'person.create', entity: 'person', entityId: id, data: { email, role: 'admin' } })
    return true
  })
}
