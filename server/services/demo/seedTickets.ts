import { randomBytes } from 'node:crypto'
import type { Knex } from 'knex'
import { saveSubscription } from '../../../db/repositories/digests'
import { listGroups } from '../../../db/repositories/groups'
import { listTickets } from '../../../db/repositories/tickets'
import { findUserByEmail } from '../../../db/repositories/users'
import { nextWeek, weekOf } from '../../../shared/assessment/week/isoWeek'
import { addEntry } from '../tickets/addEntry'
import { changeTicket } from '../tickets/changeTicket'
import { closeTicket } from '../tickets/closeTicket'
import { openTicket } from '../tickets/openTicket'
import { readTicket } from '../tickets/readTicket'
import type { Actor } from '../tickets/caller'

const DAY_MS = 86_400_000

/** Tickets in every state for the demo plant, made by the same services as real ones; nothing when there are any. */
export async function seedTickets(db: Knex, { startMs, zone, now }: { startMs: number, zone: string, now: Date }): Promise<void> {
  if ((await listTickets(db, { limit: 1 })).total > 0) return
  const person = async (role: 'engineer' | 'technician'): Promise<Actor & { userId: number }> => {
    const found = await findUserByEmail(db, `${role}@fettle.example`)
    if (!found) throw new Error(`The demo account of the ${role} is missing.`)
    return { userId: found.id, name: found.name, role }
  }
  const [engineer, technician] = [await person('engineer'), await person('technician')]
  const first = weekOf(startMs, zone)
  const third = nextWeek(nextWeek(first))
  const onDay = (day: number) => new Date(startMs + day * DAY_MS).toISOString()
  const due = (days: number) => new Date(now.getTime() + days * DAY_MS).toISOString().slice(0, 10)
  const move = async (id: number, by: Actor, state: 'inWork' | 'toVerify', more: { at?: string, workDoneAt?: string } = {}) => {
    const { version } = await readTicket(db, by, id)
    await changeTicket(db, by, id, { version, state, ...more })
  }
  const entry = (id: number, by: Actor, e: Parameters<typeof addEntry>[3]['entry'], at?: string) => addEntry(db, by, id, { entry: e, idempotencyKey: null, at: at ? new Date(at) : undefined })

  // a valve repaired in week 2, proven and closed
  const valve = await openTicket(db, engineer, { tags: ['PIC-337'], week: first, priority: 2, assigneeId: technician.userId, note: 'Swings since the summer stop. Please test the let-down valve in small steps.' })
  await move(valve, technician, 'inWork', { at: onDay(8.3) })
  await entry(valve, technician, { kind: 'check', checkId: 'operator', values: { said: 'Swings with every load; known since the summer stop.' } }, onDay(8.31))
  await entry(valve, technician, { kind: 'check', checkId: 'valveSteps', values: { step: 0.5, firstAnswerUp: 44.5, highest: 45.5, firstAnswerDown: 41 } }, onDay(8.34))
  await entry(valve, technician, { kind: 'check', checkId: 'asLeft', values: { change: 'Packing eased and greased, positioner checked against the stem.', mode: 'AUTO' } }, onDay(8.41))
  await move(valve, technician, 'toVerify', { at: onDay(8.42), workDoneAt: onDay(8.42) })
  await closeTicket(db, engineer, valve, { outcome: 'valveRepaired', reason: 'Dead band 4.5 % before, repaired on site.' })

  // a loop retuned in week 2, waiting for somebody to verify it
  const retuned = await openTicket(db, engineer, { tags: ['TIC-843'], week: first, title: 'TIC-843 hot water circuit 3 hunts', assigneeId: engineer.userId, dueOn: due(3) })
  await move(retuned, engineer, 'inWork', { at: onDay(10.4) })
  await move(retuned, engineer, 'toVerify', { at: onDay(10.6), workDoneAt: onDay(10.6) })

  const group = (await listGroups(db, third)).find(g => g.likelySource === 'FIC-312')
  const source = await openTicket(db, engineer, { groupId: group?.id ?? null, tags: ['FIC-312', 'PIC-331', 'PIC-313', 'PIC-323', 'TIC-336', 'AIC-315', 'FIC-335'], week: third, priority: 1, assigneeId: technician.userId, dueOn: due(2), title: 'FIC-312 feed water valve sticks, six loops hunt with it' })
  await move(source, technician, 'inWork')
  await openTicket(db, engineer, { tags: ['TIC-1305'], week: third, assigneeId: technician.userId, dueOn: due(-2), note: 'Why is it in manual? Ask the shift before putting it back.' })
  await openTicket(db, engineer, { tags: ['TIC-2101'], week: third, dueOn: due(10) })
  await openTicket(db, engineer, { tags: ['AIC-704'], week: third })
  for (const p of [engineer, technician]) await saveSubscription(db, { userId: p.userId, active: true, areaIds: [], token: randomBytes(9).toString('base64url') })
}
