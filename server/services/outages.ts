import type { Knex } from 'knex'
import type { Database } from '../../db/knex'
import { insertAudit } from '../../db/repositories/audit'
import { deleteOutage, findOutage, insertOutage, updateOutage, type OutageInput } from '../../db/repositories/outages'
import { hasArea } from '../../db/repositories/site'
import type { Caller } from '../../shared/types/people'
import { requestReassessment } from './assessments/requestReassessment'
import { Refusal } from './refusal'

type By = Pick<Caller, 'userId' | 'name'>
const gone = () => new Refusal(404, 'not_found', 'This outage was not found.')

async function requireArea(db: Database, areaId: number | null): Promise<void> {
  if (areaId !== null && !await hasArea(db, areaId)) throw new Refusal(422, 'invalid_input', 'This area does not exist.', { issues: [{ path: 'areaId', message: 'does not exist' }] })
}

/** Declares that an area (or the whole plant: null) was down; the weeks touched are assessed again. */
export async function addOutage(db: Knex, input: OutageInput, by: By): Promise<{ id: number }> {
  return await db.transaction(async (trx) => {
    await requireArea(trx, input.areaId)
    const id = await insertOutage(trx, { ...input, createdBy: by.userId })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'outage.create', entity: 'outage', entityId: id, data: { ...input } })
    await requestReassessment(trx, input)
    return { id }
  })
}

export async function changeOutage(db: Knex, id: number, input: OutageInput, by: By): Promise<void> {
  await db.transaction(async (trx) => {
    const before = await findOutage(trx, id)
    if (!before) throw gone()
    await requireArea(trx, input.areaId)
    await updateOutage(trx, id, input)
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'outage.change', entity: 'outage', entityId: id, data: { from: { areaId: before.areaId, from: before.from, to: before.to, reason: before.reason }, to: { ...input } } })
    await requestReassessment(trx, before)
    await requestReassessment(trx, input)
  })
}

export async function removeOutage(db: Knex, id: number, by: By): Promise<void> {
  await db.transaction(async (trx) => {
    const before = await findOutage(trx, id)
    if (!before) throw gone()
    await deleteOutage(trx, id)
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'outage.delete', entity: 'outage', entityId: id, data: { areaId: before.areaId, from: before.from, to: before.to, reason: before.reason } })
    await requestReassessment(trx, before)
  })
}
