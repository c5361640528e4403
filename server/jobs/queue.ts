import PgBoss from 'pg-boss'
import { hasJobQueue } from '../../db/repositories/health'
import type { Database } from '../../db/knex'
import { notifyWork } from '../../db/repositories/loopWeekWrites'

/**
 * Jobs are bells, not the work itself: what is to be done stands in tables (imports, assessments_due), which a worker
 * locks row by row. So a handler may run twice, a lost job costs a few seconds, and a killed worker's rows are free
 * again at once instead of after the queue's expiry.
 */
export const JOBS = ['read-imports', 'assess'] as const
export type JobName = typeof JOBS[number]

/** Never started: it only writes its own SQL, in the caller's transaction. */
const sender = new PgBoss({ db: { executeSql: () => Promise.reject(new Error('enqueue needs a transaction')) } } as never)

/** Rings for the workers when the transaction commits. */
export async function enqueue(trx: Database, name: JobName): Promise<void> {
  if (await hasJobQueue(trx)) {
    await sender.send(name, {}, {
      db: {
        // the transaction's own connection, because knex has no parameters by number
        async executeSql(text: string, values: unknown[]) {
          const connection = await trx.client.acquireConnection()
          try { return await connection.query(text, values) }
          finally { await trx.client.releaseConnection(connection) }
        },
      },
    })
  }
  await notifyWork(trx)
}
