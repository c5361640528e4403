import type { Database } from '../../../db/knex'
import { countLoopsWithout, listFleetGroups, listPlantLoopWeeks, type PlantLoopWeek } from '../../../db/repositories/loopWeeks'
import { countOpenTickets, listDueTickets } from '../../../db/repositories/plant'
import { previousWeek } from '../../../shared/assessment/week/isoWeek'
import { LEDGER_STATES } from '../../../shared/assessment/types'
import { bandOrder } from '../../../shared/ribbon/bandOrder'
import { commonUpsets } from '../../../shared/ribbon/commonUpsets'
import { noHours } from '../../../shared/ribbon/states'
import type { PlantAnswer, PlantArea } from '../../../shared/types/plant'
import { weekToShow } from '../fleet/listFleet'
import { getSettings } from '../settings'

const DAY_MS = 24 * 3600 * 1000

function account(rows: PlantLoopWeek[]) {
  const hours = noHours()
  const hoursChange = noHours()
  let lostHours = 0
  let change: number | null = null
  for (const row of rows) {
    lostHours += row.lostHours
    // only loops assessed in both weeks can be compared: a loop that is new has not got worse
    if (row.lostHoursBefore !== null) change = (change ?? 0) + row.lostHours - row.lostHoursBefore
    for (const state of LEDGER_STATES) {
      hours[state] += row.hours[state]
      if (row.hoursBefore) hoursChange[state] += row.hours[state] - row.hoursBefore[state]
    }
  }
  return { loops: rows.length, hours, lostHours, change, hoursChange: change === null ? null : hoursChange }
}

function areaOf(area: string, rows: PlantLoopWeek[]): PlantArea {
  const { loops, hours, lostHours, change } = account(rows)
  const ribbons = rows.map(row => row.ribbon)
  return {
    area, loops, hours, lostHours, change,
    weightedLostHours: rows.reduce((sum, row) => sum + row.weightedLostHours, 0),
    ribbons: bandOrder(ribbons).map(i => ({ tag: rows[i].tag, ribbon: rows[i].ribbon, lostHours: rows[i].lostHours })),
    upsets: commonUpsets(ribbons),
  }
}

/** The plant in one week: areas in the site's order with their ribbons and lost hours, and what is due. */
export async function plantWeek(db: Database, asked: string | undefined, now: Date): Promise<PlantAnswer> {
  const week = await weekToShow(db, asked, now)
  const { zone } = await getSettings(db)
  // the locale whose dates are written year-month-day
  const day = new Intl.DateTimeFormat('sv-SE', { timeZone: zone })
  const [rows, groups, missing, tickets, openTickets] = await Promise.all([
    listPlantLoopWeeks(db, week, previousWeek(week)), listFleetGroups(db, week), countLoopsWithout(db, week),
    listDueTickets(db, day.format(now), day.format(new Date(now.getTime() + 7 * DAY_MS))), countOpenTickets(db),
  ])
  const byArea = new Map<string, PlantLoopWeek[]>()
  for (const row of rows) {
    const own = byArea.get(row.area)
    if (own) own.push(row)
    else byArea.set(row.area, [row])
  }
  return { week, ...account(rows), missing, areas: [...byArea].map(([area, own]) => areaOf(area, own)), groups, tickets, openTickets }
}
