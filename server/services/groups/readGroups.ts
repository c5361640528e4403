import type { Database } from '../../../db/knex'
import { listGroups } from '../../../db/repositories/groups'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import { weekToShow } from '../fleet/listFleet'
import { getSettings } from '../settings'

export async function readGroups(db: Database, asked: string | undefined, now: Date) {
  const week = await weekToShow(db, asked, now)
  const [groups, { zone }] = await Promise.all([listGroups(db, week), getSettings(db)])
  const edges = weekFrame(week, zone).hourEdges
  return groups.map(g => ({ ...g, zone, weekFrom: edges[0], weekTo: edges[edges.length - 1] }))
}
