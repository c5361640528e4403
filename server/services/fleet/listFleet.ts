import type { Database } from '../../../db/knex'
import { countLoopsWithout, findLatestWeek, listFleetGroups, listLoopWeeks } from '../../../db/repositories/loopWeeks'
import { previousWeek, weekOf } from '../../../shared/assessment/week/isoWeek'
import type { FleetQuery } from '../../../shared/schemas/fleet'
import type { FleetAnswer } from '../../../shared/types/fleet'
import { getSettings } from '../settings'

/** The week asked for, the newest that was assessed, or the one before now where there is none yet. */
export async function weekToShow(db: Database, asked: string | undefined, now: Date): Promise<string> {
  return asked ?? await findLatestWeek(db) ?? previousWeek(weekOf(now.getTime(), (await getSettings(db)).zone))
}

/** The fleet of one week, ranked: rows, sums over all that the filters let through, groups. */
export async function listFleet(db: Database, query: FleetQuery, now: Date): Promise<FleetAnswer> {
  const week = await weekToShow(db, query.week, now)
  const [{ rows, summary }, groups, missing] = await Promise.all([
    listLoopWeeks(db, { ...query, week, weekBefore: previousWeek(week), now }),
    listFleetGroups(db, week),
    countLoopsWithout(db, week),
  ])
  return { week, total: summary.loops, rows, summary, groups, missing }
}
