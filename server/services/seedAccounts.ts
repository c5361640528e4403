import { createHash } from 'node:crypto'
import type { Knex } from 'knex'
import { readSetting, writeSetting } from '../../db/repositories/settings'
import { findUserByEmail, insertUser, updateUser } from '../../db/repositories/users'
import { ROLES, type Role } from '../../shared/types/people'
import { hashPassword, verifyPassword } from './people/passwordHash'

const names: Record<Role, string> = { admin: 'Ada Holm', engineer: 'Edda Brandt', technician: 'Tomas Reed', viewer: 'Vera Lind' }

const KEY = 'demoPasswords'

/** The demo accounts, one per role, with the passwords of this installation. Running it again changes nothing. */
export async function seedAccounts(db: Knex, passwords: Record<string, string>): Promise<void> {
  // Checking four passwords takes seconds at each start; their fingerprint tells at once that nothing changed.
  const fingerprint = createHash('sha256').update(JSON.stringify(passwords)).digest('hex')
  if (await readSetting(db, KEY) === fingerprint) return
  for (const role of ROLES) {
    const email = `${role}@fettle.example`
    const password = passwords[email]
    if (!password) continue
    const found = await findUserByEmail(db, email)
    if (!found) await insertUser(db, { email, name: names[role], role, passwordHash: await hashPassword(password), demo: true })
    // The file with the passwords may be newer than the database; what is printed has to work.
    else if (found.demo && !await verifyPassword(password, found.passwordHash)) await updateUser(db, found.id, { passwordHash: await hashPassword(password) })
  }
  await writeSetting(db, KEY, fingerprint)
}
