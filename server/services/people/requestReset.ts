import type { Knex } from 'knex'
import { findUserByEmail } from '../../../db/repositories/users'
import { getSettings } from '../settings'
import { countOrRefuse } from './attempts'
import { mailLink } from './links'

const PER_EMAIL = 3
const PER_NETWORK_ADDRESS = 30

/** Mails a link for a new password if the address has an account that may sign in. The caller learns nothing of that. */
export async function requestReset(db: Knex, { email, networkAddress, publicUrl, demo }: { email: string, networkAddress: string, publicUrl: string, demo: boolean }, now = new Date()): Promise<void> {
  await countOrRefuse(db, `reset network ${networkAddress}`, PER_NETWORK_ADDRESS, now)
  await countOrRefuse(db, `reset ${email}`, PER_EMAIL, now)
  const { siteName } = await getSettings(db)
  const user = await findUserByEmail(db, email)
  if (!user || user.disabledAt || (user.demo && !demo)) return
  // Somebody invited who lost the first mail gets a second invitation in effect: the link does the same.
  await db.transaction(trx => mailLink(trx, { user, purpose: 'passwordReset', publicUrl, siteName, now }))
}
