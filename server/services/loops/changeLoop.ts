import type { Knex } from 'knex'
import { ensureAreas } from '../../../db/repositories/areas'
import { insertAudit } from '../../../db/repositories/audit'
import { findLoop, updateLoop, type LoopConfig } from '../../../db/repositories/loops'
import { insertTuningRecord } from '../../../db/repositories/tuningRecords'
import type { LoopChange } from '../../../shared/schemas/loops'
import { reassess } from '../assessments/reassess'
import { Refusal } from '../refusal'
import { TUNING_FIELDS, UNASSESSED_FIELDS } from './setupFields'


/** Changes a loop's set-up, keeps a changed tuning in the tuning record, and has every week of the loop assessed again where that matters. */
export async function changeLoop(db: Knex, by: { userId: number | null, name: string }, tag: string, { version, area, ...fields }: LoopChange): Promise<{ changed: string[], weeks: number }> {
  return db.transaction(async (trx) => {
    const loop = await findLoop(trx, tag)
    if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
    if (version !== undefined && version !== loop.version) throw new Refusal(409, 'changed_meanwhile', `Somebody changed ${tag} meanwhile. Look at it again and save once more.`, { version: loop.version })
    const change: Partial<LoopConfig> = { ...fields }
    if (area !== undefined) change.areaId = area ? (await ensureAreas(trx, [area])).get(area)! : null
    if (change.pvLow !== undefined || change.pvHigh !== undefined) change.rangeGuessed = false
    const changed = (Object.keys(change) as (keyof LoopConfig)[]).filter(key => JSON.stringify(change[key]) !== JSON.stringify(loop[key]))
    if (changed.length === 0) return { changed: [], weeks: 0 }
    const low = change.pvLow === undefined ? loop.pvLow : change.pvLow
    const high = change.pvHigh === undefined ? loop.pvHigh : change.pvHigh
    if (low !== null && high !== null && low >= high) throw new Refusal(422, 'invalid_input', 'The range must rise from low to high.', { issues: [{ path: 'pvHigh', message: 'must be above the low end of the range' }] })
    await updateLoop(trx, loop.id, change)
    if (TUNING_FIELDS.some(key => changed.includes(key))) {
      const tuningOf = (source: Partial<LoopConfig>) => Object.fromEntries(TUNING_FIELDS.map(key => [key, (key in source ? source[key] : loop[key]) as string | number | null]))
      await insertTuningRecord(trx, { loopId: loop.id, ticketId: null, userId: by.userId, actor: by.name, kind: 'imported', tuning: tuningOf(change), reason: 'Set-up of the loop changed.', changeNumber: null })
    }
    const weeks = changed.some(key => !UNASSESSED_FIELDS.has(key)) ? await reassess(trx, [loop.id], null, `set-up changed: ${changed.join(', ')}`) : 0
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.change', entity: 'loop', entityId: tag, data: Object.fromEntries(changed.map(key => [key, { from: loop[key], to: change[key] }])) })
    return { changed, weeks }
  })
}
