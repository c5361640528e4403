import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findUserByEmail } from '../../../db/repositories/users'
import type { Person } from '../../../shared/types/people'
import { Refusal } from '../refusal'
import { countOrRefuse, forgetAttempts } from './attempts'
import { verifyPassword } from './passwordHash'

/** Per address, and per network address for those who try many accounts; a whole control room may share the latter. */
const PER_EMAIL = 10
const PER_NETWORK_ADDRESS = 100

/**
 * The person of an address and password, or one and the same refusal whatever is wrong: unknown address, wrong password,
 * no password yet, disabled, demo account on a site without the demo. It also takes the same time.
 */
export async function checkSignIn(db: Knex, input: { email: string, password: string, networkAddress: string, demo: boolean }, now = new Date()): Promise<Person> {
  const byEmail = `email ${input.email}`
  await countOrRefuse(db, `network ${input.networkAddress}`, PER_NETWORK_ADDRESS, now)
  await countOrRefuse(db, byEmail, PER_EMAIL, now)
  const user = await findUserByEmail(db, input.email)
  const right = await verifyPassword(input.password, user?.passwordHash ?? null)
  if (!user || !right || user.disabledAt || (user.demo && !input.demo)) throw new Refusal(401, 'wrong_credentials', 'This address and password do not belong together.')
  await forgetAttempts(db, byEmail)
  await insertAudit(db, { userId: user.id, actor: user.name, action: 'person.signIn', entity: 'person', entityId: user.id })
  return { id: user.id, email: user.email, name: user.name, role: user.role }
}
