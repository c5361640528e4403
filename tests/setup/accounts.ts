import type { Knex } from 'knex'
import { insertUser } from '../../db/repositories/users'
import { hashPassword } from '../../server/services/people/passwordHash'
import { ROLES, type Role } from '../../shared/types/people'

export interface Account { id: number, email: string, password: string, role: Role }
export type Accounts = Record<Role, Account>

/** One account per role. All share a password, because hashing four would cost each test file two seconds. */
export async function makeAccounts(db: Knex): Promise<Accounts> {
  const password = 'a long enough password'
  const passwordHash = await hashPassword(password)
  const accounts = {} as Accounts
  for (const role of ROLES) {
    const email = `${role}@site.example`
    const id = await insertUser(db, { email, name: `${role[0]!.toUpperCase()}${role.slice(1)} Test`, role, passwordHash })
    accounts[role] = { id: id!, email, password, role }
  }
  return accounts
}
