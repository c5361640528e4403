import type { Database } from '../../../db/knex'
import { insertDue } from '../../../db/repositories/loopWeekWrites'
import { enqueue } from '../../jobs/queue'

/** Has loop-weeks assessed by the workers, in the caller's transaction. `cause` is kept in their history. */
export async function requestAssessments(trx: Database, due: { loopId: number, week: string }[], cause: string, importId: number | null = null): Promise<number> {
  if (due.length === 0) return 0
  await insertDue(trx, due, cause, importId)
  await enqueue(trx, 'assess')
  return due.length
}
