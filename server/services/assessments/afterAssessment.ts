import type { Knex } from 'knex'
import { findGroupsOfWeek } from '../groups/findGroupsOfWeek'
import { markChanges } from '../groups/markChanges'
import { watchClosed } from '../tickets/watchClosed'

/** What looks at a whole week once all its loops are assessed, in this order. Each may run again for the same week. */
export const afterAssessment: ((trx: Knex.Transaction, week: string) => Promise<void>)[] = [findGroupsOfWeek, markChanges, watchClosed]
