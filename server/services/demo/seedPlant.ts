import type { Knex } from 'knex'
import { ensureAreas } from '../../../db/repositories/areas'
import { insertLoops, listLoops, type LoopConfig } from '../../../db/repositories/loops'
import { insertWeeksDue, listLoopWeekKeys, writeLoopWeeks } from '../../../db/repositories/loopWeekWrites'
import { insertOutage, listOutages } from '../../../db/repositories/outages'
import { readSetting, writeSetting } from '../../../db/repositories/settings'
import { storeBlocks } from '../../../db/repositories/trendBlocks'
import { demoOutages, demoPlant, type DemoLoop, type DemoWeeks } from '../../../db/seeds/demo/tarnHollow'
import { previousWeek, weekFrame, weekOf } from '../../../shared/assessment/week/isoWeek'
import type { SeedAnswer, SeedTask } from '../../threads/seedLoop'
import { finishWeeks } from '../assessments/assessDue'
import { loopSetup } from '../loops/loopSetup'
import { getSettings } from '../settings'
import { seedTickets } from './seedTickets'

const WEEKS = 3
const KEY = 'demoWeeks'

const configOf = ({ setup: s, description, unit, intervalS }: DemoLoop, areaId: number): Partial<LoopConfig> => ({
  description, areaId, unit, type: s.type, pvLow: s.pvLow, pvHigh: s.pvHigh, pvUnit: s.pvUnit, opLow: s.opLow, opHigh: s.opHigh, normalModes: s.normalModes, tolerance: s.tolerance,
  priority: s.priority, deadTimeS: s.deadTimeS, intervalS, settlingS: s.settlingS, form: s.form, action: s.action, gain: s.gain, gainUnit: 'gain', integralTime: s.integralTimeS,
  derivativeTime: s.derivativeTimeS, timeUnit: 's', filterTimeS: s.filterTimeS, setpointWeight: s.setpointWeight, hysteresis: s.hysteresis, upstream: s.upstream, rangeGuessed: false,
})

/**
 * Makes the demo plant: areas, loops, outages, the last three whole weeks of records, and their assessments. Loops that
 * are complete are left alone, so that a start that was cut short goes on where it ended.
 */
export async function seedPlant(db: Knex, run: (task: SeedTask) => Promise<SeedAnswer>, { now, progress }: { now: Date, progress: (done: number, of: number) => void }): Promise<void> {
  const plant = demoPlant()
  const { loops, weeks } = await db.transaction(async (trx) => {
    if (await readSetting(trx, 'siteName') === undefined) await writeSetting(trx, 'siteName', 'Tarn Hollow Tileworks')
    const { zone } = await getSettings(trx)
    let startMs = await readSetting(trx, KEY) as number | undefined
    if (startMs === undefined) {
      let week = weekOf(now.getTime(), zone)
      for (let i = 0; i < WEEKS; i++) week = previousWeek(week)
      startMs = weekFrame(week, zone).hourEdges[0]
      await writeSetting(trx, KEY, startMs)
    }
    const weeks: DemoWeeks = { startMs, weeks: WEEKS, zone }
    const areas = await ensureAreas(trx, plant.map(l => l.area))
    await insertLoops(trx, plant.map(l => ({ tag: l.setup.tag, ...configOf(l, areas.get(l.area)!) })))
    const known = await listOutages(trx)
    for (const o of demoOutages(weeks)) {
      const span = { areaId: areas.get(o.area)!, from: new Date(o.fromMs), to: new Date(o.toMs) }
      if (!known.some(k => k.areaId === span.areaId && k.from.getTime() === o.fromMs)) await insertOutage(trx, { ...span, reason: o.reason, createdBy: null })
    }
    return { loops: new Map((await listLoops(trx)).map(l => [l.tag, l])), weeks }
  })
  const settings = await getSettings(db)
  const made = new Map<number, number>()
  for (const { loopId } of await listLoopWeekKeys(db, {})) made.set(loopId, (made.get(loopId) ?? 0) + 1)
  const outages = demoOutages(weeks)
  let done = 0
  await Promise.all(plant.map(async ({ setup: { tag }, area }, index) => {
    const loop = loops.get(tag)!
    if ((made.get(loop.id) ?? 0) < WEEKS) {
      const answer = await run({ index, loopId: loop.id, setup: loopSetup(loop, settings), version: loop.version, weeks, outages: outages.filter(o => o.area === area) })
      await db.transaction(async (trx) => {
        await storeBlocks(trx, answer.blocks)
        await writeLoopWeeks(trx, answer.weeks.map(w => ({ loopId: loop.id, cause: 'demo', ...w })))
      })
    }
    progress(++done, plant.length)
  }))
  // groups and changes are looked at once all loops are there
  await insertWeeksDue(db, [...new Set((await listLoopWeekKeys(db, {})).map(k => k.week))])
  await finishWeeks(db)
  await seedTickets(db, { startMs: weeks.startMs, zone: weeks.zone, now })
}
