import type { Knex } from 'knex'
import { listRibbonsUntil, writeChangeMarks } from '../../../db/repositories/groups'
import { weekChange, type WeekRibbon } from '../../../shared/assessment/history/weekChange'

/** Marks loops that got worse or better than their own past weeks beyond chance, with the week in which that began. */
export async function markChanges(trx: Knex.Transaction, week: string): Promise<void> {
  const byLoop = new Map<number, WeekRibbon[]>()
  for (const { loopId, ...row } of await listRibbonsUntil(trx, week)) {
    const weeks = byLoop.get(loopId)
    if (weeks) weeks.push(row)
    else byLoop.set(loopId, [row])
  }
  const marks: { loopId: number, mark: string, since: string }[] = []
  for (const [loopId, weeks] of byLoop) {
    if (weeks[weeks.length - 1]!.week !== week) continue
    const change = weekChange(weeks)
    if (change) marks.push({ loopId, mark: change.mark, since: change.since })
  }
  await writeChangeMarks(trx, week, marks)
}
