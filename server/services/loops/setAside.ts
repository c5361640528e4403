import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findLoop } from '../../../db/repositories/loops'
import { endSetAsides, endShelvings, findLoopWeek, insertConcern, insertSetAside, insertShelving } from '../../../db/repositories/loopPage'
import { Refusal } from '../refusal'

interface By { userId: number | null, name: string }

async function loopOr404(db: Knex.Transaction, tag: string) {
  const loop = await findLoop(db, tag)
  if (!loop) throw new Refusal(404, 'not_found', `There is no loop named ${tag}.`)
  return loop
}
function inFuture(untilAt: string, now: Date): Date {
  const until = new Date(untilAt)
  if (until <= now) throw new Refusal(422, 'invalid_input', 'The end date must lie ahead.', { issues: [{ path: 'untilAt', message: 'must lie ahead' }] })
  return until
}

/** "Not a problem, because ...": the loop leaves the ranking until then and stays visible as set aside. */
export async function setAside(db: Knex, by: By, tag: string, { week, reason, untilAt }: { week: string, reason: string, untilAt: string }, now = new Date()): Promise<void> {
  await db.transaction(async (trx) => {
    const loop = await loopOr404(trx, tag)
    const assessed = await findLoopWeek(trx, loop.id, week)
    if (!assessed) throw new Refusal(422, 'invalid_input', `${tag} was not assessed in ${week}.`)
    await endSetAsides(trx, loop.id)
    await insertSetAside(trx, { loopId: loop.id, verdict: assessed.detail.verdict, week, reason, untilAt: inFuture(untilAt, now), userId: by.userId })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.setAside', entity: 'loop', entityId: tag, data: { week, verdict: assessed.detail.verdict, reason, untilAt } })
  })
}

export async function endSetAside(db: Knex, by: By, tag: string): Promise<void> {
  await db.transaction(async (trx) => {
    const loop = await loopOr404(trx, tag)
    if (await endSetAsides(trx, loop.id)) await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.takeBack', entity: 'loop', entityId: tag })
  })
}

/** Shelved: left out of digest and slide-back watch until then, with a reason; for loops that are out of use for a while. */
export async function shelve(db: Knex, by: By, tag: string, { reason, untilAt }: { reason: string, untilAt: string }, now = new Date()): Promise<void> {
  await db.transaction(async (trx) => {
    const loop = await loopOr404(trx, tag)
    await endShelvings(trx, loop.id)
    await insertShelving(trx, { loopId: loop.id, untilAt: inFuture(untilAt, now), reason, userId: by.userId })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.shelve', entity: 'loop', entityId: tag, data: { reason, untilAt } })
  })
}

export async function unshelve(db: Knex, by: By, tag: string): Promise<void> {
  await db.transaction(async (trx) => {
    const loop = await loopOr404(trx, tag)
    if (await endShelvings(trx, loop.id)) await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.unshelve', entity: 'loop', entityId: tag })
  })
}

export async function raiseConcern(db: Knex, by: By, tag: string, text: string): Promise<void> {
  await db.transaction(async (trx) => {
    const loop = await loopOr404(trx, tag)
    await insertConcern(trx, { loopId: loop.id, text, userId: by.userId })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'loop.concern', entity: 'loop', entityId: tag, data: { text } })
  })
}
