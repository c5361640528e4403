import type { Database } from '../../../db/knex'
import { listLoopWeekKeys } from '../../../db/repositories/loopWeekWrites'
import { weeksBetween } from '../../../shared/assessment/week/isoWeek'
import { getSettings } from '../settings'
import { requestAssessments } from './requestAssessments'

/** Has the loops of an area (all loops: null) assessed again for every week that a span touches. */
export async function requestReassessment(trx: Database, span: { areaId: number | null, from: Date, to: Date }, cause = 'outage changed'): Promise<void> {
  const { zone } = await getSettings(trx)
  const weeks = weeksBetween(span.from.getTime(), span.to.getTime(), zone)
  await requestAssessments(trx, await listLoopWeekKeys(trx, { weeks, areaId: span.areaId }), cause)
}
