import type { Knex } from 'knex'
import { listBlocks } from '../../../db/repositories/trendBlocks'
import { addAssessed, finishImports } from '../../../db/repositories/imports'
import { deleteDue, deleteWeekDue, listOutagesOf, lockDue, lockFinishedWeek, writeLoopWeeks, type LoopWeekWrite } from '../../../db/repositories/loopWeekWrites'
import { listLoops } from '../../../db/repositories/loops'
import { weekFrame } from '../../../shared/assessment/week/isoWeek'
import type { AssessAnswer, AssessTask } from '../../threads/assess'
import { loopSetup } from '../loops/loopSetup'
import { getSettings } from '../settings'
import { afterAssessment } from './afterAssessment'

export type RunAssess = (task: AssessTask) => Promise<AssessAnswer>

/**
 * Assesses one batch of waiting loop-weeks of one week. Rows, results and the count of the imports change in one
 * transaction: a worker that dies leaves the rows to the next one and no half-written week.
 * @returns how many there were; 0: nothing waits, or others have it
 */
export async function assessBatch(db: Knex, run: RunAssess, limit: number): Promise<number> {
  return await db.transaction(async (trx) => {
    const due = await lockDue(trx, limit)
    if (due.length === 0) return 0
    const settings = await getSettings(trx)
    const week = due[0].week
    const edges = weekFrame(week, settings.zone).hourEdges
    const from = edges[0]
    const to = edges[edges.length - 1]
    const ids = due.map(d => d.loopId)
    const [loops, blocks, outages] = [await listLoops(trx, ids), await listBlocks(trx, ids, from, to), await listOutagesOf(trx, from, to)]
    const blocksOf = groupBy(blocks)
    const writes: LoopWeekWrite[] = []
    await Promise.all(due.map(async ({ loopId, cause }) => {
      const loop = loops.find(l => l.id === loopId)
      const own = blocksOf.get(loopId)
      // a week whose last samples were taken away keeps its old figures
      if (!loop || !own) return
      const task: AssessTask = {
        setup: loopSetup(loop, settings), version: loop.version, week, zone: settings.zone, blocks: own,
        outages: outages.filter(o => o.areaId === null || o.areaId === loop.areaId).map(({ fromMs, toMs }) => ({ fromMs, toMs })),
      }
      try {
        writes.push({ loopId, week, cause, ...await run(task) })
      }
      catch (error) {
        // one loop that cannot be assessed must not hold up the others
        console.error(`Assessment of ${loop.tag} in ${week}:`, error)
      }
    }))
    await writeLoopWeeks(trx, writes.sort((a, b) => a.loopId - b.loopId))
    await deleteDue(trx, due)
    const counts = new Map<number, number>()
    for (const d of due) for (const id of d.importIds) counts.set(id, (counts.get(id) ?? 0) + 1)
    await addAssessed(trx, counts)
    return due.length
  })
}

function groupBy<T extends { loopId: number }>(rows: T[]): Map<number, T[]> {
  const groups = new Map<number, T[]>()
  for (const row of rows) {
    const group = groups.get(row.loopId)
    if (group) group.push(row)
    else groups.set(row.loopId, [row])
  }
  return groups
}

/** Looks at weeks whose loops are all assessed, then ends the imports that waited for them. */
export async function finishWeeks(db: Knex): Promise<void> {
  for (;;) {
    const week = await db.transaction(async (trx) => {
      const found = await lockFinishedWeek(trx)
      if (!found) return null
      for (const step of afterAssessment) {
        // in a savepoint: a step that fails must not keep the week, and the imports that wait for it, open for ever
        await trx.transaction(part => step(part, found)).catch((error: Error & { code?: string }) => {
          if (/^(57P|08|ECONN)/.test(error.code ?? '')) throw error
          console.error(`${step.name} of ${found}:`, error)
        })
      }
      await deleteWeekDue(trx, found)
      return found
    })
    if (!week) break
  }
  await finishImports(db)
}

/** Works until nothing waits. Several lanes, so that one loads and writes while the threads compute for another. */
export async function assessDue(db: Knex, run: RunAssess, { lanes, batch, stopped = () => false }: { lanes: number, batch: number, stopped?: () => boolean }): Promise<void> {
  await Promise.all(Array.from({ length: lanes }, async () => {
    while (!stopped() && await assessBatch(db, run, batch) > 0);
  }))
  if (!stopped()) await finishWeeks(db)
}
