import { availableParallelism } from 'node:os'
import { openDatabase } from '../db/knex'
import type { SeedAnswer } from './threads/seedLoop'
import { seedPlant } from './services/demo/seedPlant'
import { readEnvironment } from './services/environment'
import { threadPool } from './worker/threadPool'

/** Makes the demo plant on a first start. May be stopped and run again. */
const environment = readEnvironment(process.env)
const db = openDatabase(environment.DATABASE_URL, { poolSize: 4 })
const pool = threadPool('seedLoop', environment.WORKER_THREADS ?? availableParallelism())
// The start command that launched us is gone; whatever is done stays done. Waiting for that must not keep us alive.
process.on('disconnect', () => process.exit(1))
process.channel?.unref()
const started = Date.now()
let said = 0
try {
  await seedPlant(db, async task => await pool.run(task) as SeedAnswer, {
    now: new Date(),
    progress: (done, of) => {
      const tenth = Math.floor(done / of * 10)
      if (tenth === said) return
      said = tenth
      console.log(`  ${done} of ${of} loops, ${Math.round((Date.now() - started) / 1000)} s`)
    },
  })
}
finally {
  await pool.destroy()
  await db.destroy()
}
