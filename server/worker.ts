import { openDatabase } from '../db/knex'
import { WORKER_NAME } from '../db/repositories/health'
import { readEnvironment } from './services/environment'
import { sendDueDigest } from './services/digest/sendDueDigest'
import { remindOverdue } from './services/tickets/remindOverdue'
import { startImports } from './worker/imports'
import { startMail } from './worker/mail'
import { every } from './worker/every'

/**
 * The worker process: everything that is not the answer to a request. Any number of them may run; the further ones read
 * and assess, and leave mail to the one beside the web server, which knows the mail server and the site's address.
 */
const environment = readEnvironment(process.env)
const db = openDatabase(environment.DATABASE_URL, { name: WORKER_NAME })

const stops = [await startImports(db, environment)]
if (environment.EXTRA_WORKER === 'off') {
  stops.push(
    await startMail(db, environment),
    every(60_000, 'Overdue tickets', () => remindOverdue(db, new Date())),
    every(60_000, 'Digest', () => sendDueDigest(db, { publicUrl: environment.PUBLIC_URL, now: new Date() })),
  )
}

let ending = false
async function end() {
  if (ending) return
  ending = true
  await Promise.allSettled(stops.map(stop => stop()))
  await db.destroy()
  process.exit(0)
}
process.on('SIGTERM', end)
process.on('SIGINT', end)
// The start command that launched us is gone.
process.on('disconnect', end)
