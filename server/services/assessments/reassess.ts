import type { Database } from '../../../db/knex'
import { listLoopWeekKeys } from '../../../db/repositories/loopWeekWrites'
import { requestAssessments } from './requestAssessments'

/** Has exactly these loop-weeks assessed again: of some loops (all: null), of some weeks (all that are on record: null). */
export async function reassess(trx: Database, loopIds: number[] | null, weeks: string[] | null, cause: string): Promise<number> {
  return await requestAssessments(trx, await listLoopWeekKeys(trx, { loopIds: loopIds ?? undefined, weeks: weeks ?? undefined }), cause)
}
