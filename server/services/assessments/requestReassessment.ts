import type { Database } from '../../../db/knex'

/** Has the loops of an area (all loops: null) assessed again for every week that a span touches. */
export async function requestReassessment(_trx: Database, _span: { areaId: number | null, from: Date, to: Date }): Promise<void> {
  // The queue of assessments is filled here once it exists.
}
