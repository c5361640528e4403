import type { Database } from '../../../db/knex'
import { findChangeSheet, listChangeSheets } from '../../../db/repositories/changeSheets'
import { findLoop } from '../../../db/repositories/loops'
import type { ChangeSheetView } from '../../../shared/types/tuning'
import { Refusal } from '../refusal'
import { getSettings } from '../settings'

export async function readSheet(db: Database, id: number): Promise<Omit<ChangeSheetView, 'madeAt'> & { madeAt: Date }> {
  const row = await findChangeSheet(db, id)
  if (!row) throw new Refusal(404, 'not_found', `There is no change sheet ${id}.`)
  const { loopId: _, ...view } = row
  return { ...view, zone: (await getSettings(db)).zone }
}

/** The sheets made for a loop, newest first, without their content. */
export async function listSheets(db: Database, tag: string) {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  return (await listChangeSheets(db, { loopId: loop.id })).map(({ id, madeAt, madeBy, ticketId, sheet }) => ({ id, madeAt, madeBy, ticketId, rule: sheet.rule, changeNumber: sheet.changeNumber, expectedIaeRatio: sheet.benefit.expectedIaeRatio }))
}
