import { openDatabase } from '../db/knex'
import { migrate } from '../db/migrate'
import { readEnvironment } from './services/environment'
import { ensureFirstAdmin } from './services/people/ensureFirstAdmin'
import { seedAccounts } from './services/seedAccounts'
import { demoToSeed, markDemoSeeded } from './services/demoMark'
import { countAccounts } from '../db/repositories/users'

/**
 * Prepares a database for a start: schema, first account, demo accounts. The last line printed is JSON for the start
 * command. Safe to run at any time and by several processes at once.
 */
const environment = readEnvironment(process.env)
const db = openDatabase(environment.DATABASE_URL, { poolSize: 2 })
try {
  const applied = await migrate(db)
  if (process.argv.includes('--demo-seeded')) await markDemoSeeded(db)
  if (environment.ADMIN_EMAIL && environment.ADMIN_PASSWORD) await ensureFirstAdmin(db, environment.ADMIN_EMAIL, environment.ADMIN_PASSWORD)
  if (environment.DEMO === 'on' && process.env.DEMO_PASSWORDS) await seedAccounts(db, JSON.parse(process.env.DEMO_PASSWORDS))
  const accounts = await countAccounts(db, { withDemo: environment.DEMO === 'on' })
  console.log(JSON.stringify({ applied, accounts, demoToSeed: environment.DEMO === 'on' && await demoToSeed(db) }))
}
finally {
  await db.destroy()
}
