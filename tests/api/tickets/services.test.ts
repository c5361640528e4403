import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { findTicket, listTicketEvents } from '../../../db/repositories/tickets'
import { addEntry } from '../../../server/services/tickets/addEntry'
import { changeTicket } from '../../../server/services/tickets/changeTicket'
import { closeTicket } from '../../../server/services/tickets/closeTicket'
import { listTickets } from '../../../server/services/tickets/listTickets'
import { openTicket } from '../../../server/services/tickets/openTicket'
import { proveTicket } from '../../../server/services/tickets/proveTicket'
import { remindOverdue } from '../../../server/services/tickets/remindOverdue'
import { readBenefit } from '../../../server/services/tickets/benefit'
import { watchClosed } from '../../../server/services/tickets/watchClosed'
import { makeAccounts, type Accounts } from '../../setup/accounts'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { addLoop, addSamples, addWeek, weekSpan } from '../../setup/ticketPlant'

let scratch: ScratchDatabase
let accounts: Accounts
beforeAll(async () => {
  scratch = await scratchDatabase()
  accounts = await makeAccounts(scratch.db)
})
afterAll(() => scratch.drop())

const engineer = () => ({ userId: accounts.engineer.id, name: 'Engineer Test', role: 'engineer' as const })
const technician = () => ({ userId: accounts.technician.id, name: 'Technician Test', role: 'technician' as const })
const iso = (ms: number) => new Date(ms).toISOString()
let made = 0

/** A loop whose error is halved by work done on the first moment of 2026-W41, brought to `toVerify`. */
async function worked({ after = 1, weeks = ['2026-W41'], lostAfter = 4 } = {}) {
  const { db } = scratch
  const tag = `FIC-${9000 + made++}`
  const id = await addLoop(db, tag)
  const before = weekSpan('2026-W40')
  await addSamples(db, id, before.fromMs, before.toMs, { sd: 2, seed: made })
  await addWeek(db, id, '2026-W40', { lost: 60 })
  for (const week of weeks) {
    const span = weekSpan(week)
    await addSamples(db, id, span.fromMs, span.toMs, { sd: after, seed: 100 + made })
    await addWeek(db, id, week, { lost: lostAfter, verdict: 'steady' })
  }
  const ticket = await openTicket(db, engineer(), { tags: [tag], week: '2026-W40', assigneeId: accounts.technician.id })
  await changeTicket(db, technician(), ticket, { version: 1, state: 'inWork' })
  await changeTicket(db, technician(), ticket, { version: 2, state: 'toVerify', workDoneAt: iso(before.toMs) })
  return { ticket, tag, id }
}

describe('proof of a ticket', () => {
  it('finds the built-in halving of the error (ratio 0.5, variance 0.25) and 56 hours a week won', async () => {
    const { ticket } = await worked()
    const proof = await proveTicket(scratch.db, ticket)
    const [loop] = proof.loops
    expect(proof).toMatchObject({ verdict: 'better', provisional: true, chosenByHand: false })
    expect(loop!.before).toEqual(weekSpan('2026-W40'))
    expect(loop!.iaeRatio!.low).toBeLessThan(0.5)
    expect(loop!.iaeRatio!.high).toBeGreaterThan(0.5)
    expect(loop!.varianceRatio!.value).toBeGreaterThan(0.18)
    expect(loop!.varianceRatio!.value).toBeLessThan(0.34)
    expect(loop!.lostHoursWonPerWeek!.value).toBeCloseTo(56, 0)
    expect(loop!.checks.every(c => c.ok)).toBe(true)
  })
  it('calls no difference where there is none, and cannot tell without data after the work', async () => {
    const same = await worked({ after: 2, lostAfter: 60 })
    expect((await proveTicket(scratch.db, same.ticket)).verdict).toBe('noChange')
    const none = await worked({ weeks: [] })
    expect(await proveTicket(scratch.db, none.ticket)).toMatchObject({ verdict: 'cannotTell', loops: [{ reason: 'There are no data yet from the time after the work.' }] })
  })
  it('is final at once where a further comparable week is on record', async () => {
    const { ticket } = await worked({ weeks: ['2026-W41', '2026-W42'] })
    const proof = await proveTicket(scratch.db, ticket)
    expect(proof.provisional).toBe(false)
    expect(proof.loops[0]!.after.toMs).toBeGreaterThan(weekSpan('2026-W42').toMs - 120_000)
  })
  it('takes windows chosen by hand and says so; refuses those that are none', async () => {
    const { ticket } = await worked()
    const { fromMs } = weekSpan('2026-W41')
    const proof = await proveTicket(scratch.db, ticket, { afterFrom: iso(fromMs), afterTo: iso(fromMs + 3 * 86_400_000) })
    expect(proof.chosenByHand).toBe(true)
    expect(proof.loops[0]!.after.toMs).toBe(fromMs + 3 * 86_400_000)
    await expect(proveTicket(scratch.db, ticket, { afterFrom: iso(fromMs), afterTo: iso(fromMs) })).rejects.toMatchObject({ statusCode: 422 })
  })
})

describe('closing', () => {
  it('refuses an outcome that the proof contradicts until a reason is given', async () => {
    const { ticket } = await worked({ after: 2, lostAfter: 60 })
    await expect(closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned' })).rejects.toMatchObject({ statusCode: 409, data: { code: 'proof_says_otherwise', proof: 'noChange' } })
    expect((await findTicket(scratch.db, ticket))!.state).toBe('toVerify')
    await closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned', reason: 'the load was not typical' })
    expect(await findTicket(scratch.db, ticket)).toMatchObject({ state: 'closed', outcome: 'retuned', closeReason: 'the load was not typical' })
  })
  it('is for engineers, from toVerify only, and on the version seen', async () => {
    const { ticket } = await worked()
    await expect(closeTicket(scratch.db, technician(), ticket, { outcome: 'retuned' })).rejects.toMatchObject({ statusCode: 403 })
    await expect(closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned', version: 1 })).rejects.toMatchObject({ statusCode: 409, data: { code: 'changed_meanwhile' } })
    await changeTicket(scratch.db, engineer(), ticket, { version: 3, state: 'inWork', reason: 'look again' })
    await expect(closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned' })).rejects.toMatchObject({ statusCode: 409, data: { code: 'illegal_move' } })
  })
})

describe('watch after closing', () => {
  const watch = (week: string) => scratch.db.transaction(trx => watchClosed(trx, week))
  it('makes a provisional proof final with the next comparable week, and counts it as won only then', async () => {
    const { ticket, id } = await worked()
    await closeTicket(scratch.db, engineer(), ticket, { outcome: 'valveRepaired' })
    expect((await findTicket(scratch.db, ticket))!.proofFinal).toBe(false)
    const apart = await readBenefit(scratch.db)
    expect(apart.rows.find(r => r.tickets.includes(ticket))).toMatchObject({ area: 'Glaze preparation', hours: 0 })
    const span = weekSpan('2026-W42')
    await addSamples(scratch.db, id, span.fromMs, span.toMs, { sd: 1, seed: 500 })
    await addWeek(scratch.db, id, '2026-W42', { lost: 4, verdict: 'steady' })
    await watch('2026-W42')
    await watch('2026-W42')
    const closed = await findTicket(scratch.db, ticket)
    expect(closed).toMatchObject({ proofFinal: true, proof: { verdict: 'better', provisional: false } })
    expect((await listTicketEvents(scratch.db, ticket)).filter(e => e.kind === 'proofFinal')).toHaveLength(1)
    expect((await readBenefit(scratch.db)).rows.find(r => r.tickets.includes(ticket))!.hours).toBeCloseTo(56, 0)
    expect(await scratch.db('tickets').where({ follow_up_of: ticket })).toHaveLength(0)
  })
  it('opens one follow-up when the loop slides back, and mails those who closed and worked', async () => {
    const { ticket, tag, id } = await worked({ weeks: ['2026-W41', '2026-W42'] })
    await closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned' })
    const span = weekSpan('2026-W44')
    await addSamples(scratch.db, id, span.fromMs, span.toMs, { sd: 3, seed: 600 })
    await addWeek(scratch.db, id, '2026-W44', { lost: 80 })
    await watch('2026-W44')
    await watch('2026-W44')
    const followUps = await scratch.db('tickets').where({ follow_up_of: ticket })
    expect(followUps).toHaveLength(1)
    expect(followUps[0]).toMatchObject({ state: 'open', week: '2026-W44', title: `${tag} slid back after ticket ${ticket}` })
    const mails = await scratch.db('mails').where('key', 'like', `slideBack-${ticket}-%`).orderBy('recipient')
    expect(mails.map(m => m.recipient)).toEqual(['engineer@site.example', 'technician@site.example'])
    // a win that slid back is none any more
    const row = (await readBenefit(scratch.db)).rows.find(r => r.tickets.includes(ticket))!
    expect(row.slidBackHours).toBeGreaterThan(50)
  })
  it('leaves a shelved loop alone', async () => {
    const { ticket, id } = await worked({ weeks: ['2026-W41', '2026-W42'] })
    await closeTicket(scratch.db, engineer(), ticket, { outcome: 'retuned' })
    await scratch.db('shelvings').insert({ loop_id: id, until_at: new Date(Date.now() + 86_400_000), reason: 'rebuilt' })
    const span = weekSpan('2026-W44')
    await addSamples(scratch.db, id, span.fromMs, span.toMs, { sd: 3, seed: 700 })
    await addWeek(scratch.db, id, '2026-W44', { lost: 80 })
    await watch('2026-W44')
    expect(await scratch.db('tickets').where({ follow_up_of: ticket })).toHaveLength(0)
  })
})

describe('entries from a device', () => {
  it('are taken once, keep the time they were written, and compute the dead band (closed form 52 - 49.5)', async () => {
    const { ticket, tag } = await worked()
    const at = new Date('2026-10-06T09:00:00Z')
    const entry = () => ({ kind: 'check' as const, checkId: 'valveSteps', tag, values: { step: 0.5, firstAnswerUp: 51, highest: 52, firstAnswerDown: 49.5, foreign: 'x' } })
    expect(await addEntry(scratch.db, technician(), ticket, { entry: entry(), idempotencyKey: 'key-number-1', at })).toBe(true)
    expect(await addEntry(scratch.db, technician(), ticket, { entry: entry(), idempotencyKey: 'key-number-1', at })).toBe(false)
    const { checks } = (await findTicket(scratch.db, ticket))!
    expect(checks[tag]!.valveSteps).toEqual({ values: { step: 0.5, firstAnswerUp: 51, highest: 52, firstAnswerDown: 49.5, deadBand: 2.5, uncertainty: 0.5 }, at: at.toISOString(), by: 'Technician Test' })
    expect((await listTicketEvents(scratch.db, ticket)).filter(e => e.kind === 'check')).toHaveLength(1)
  })
  it('sent again are known even after the ticket went to somebody else; new ones are refused by name', async () => {
    const { ticket, tag } = await worked()
    const entry = () => ({ kind: 'check' as const, checkId: 'operator', tag, values: { said: 'hunts since Monday' } })
    await addEntry(scratch.db, technician(), ticket, { entry: entry(), idempotencyKey: 'before-reassigning' })
    await changeTicket(scratch.db, engineer(), ticket, { version: (await findTicket(scratch.db, ticket))!.version, assigneeId: accounts.engineer.id })
    expect(await addEntry(scratch.db, technician(), ticket, { entry: entry(), idempotencyKey: 'before-reassigning' })).toBe(false)
    await expect(addEntry(scratch.db, technician(), ticket, { entry: entry(), idempotencyKey: 'after-reassigning' })).rejects.toMatchObject({ statusCode: 403, data: { code: 'not_allowed' } })
    expect(await addEntry(scratch.db, technician(), ticket, { entry: { kind: 'comment', text: 'what I found' }, idempotencyKey: 'after-reassigning' })).toBe(true)
  })
  it('show the other answer when somebody answered the same check meanwhile', async () => {
    const { ticket, tag } = await worked()
    const entry = (said: string, replaces: string | null) => ({ kind: 'check' as const, checkId: 'operator', tag, values: { said }, replaces })
    await addEntry(scratch.db, engineer(), ticket, { entry: entry('mine', null), idempotencyKey: null })
    await expect(addEntry(scratch.db, technician(), ticket, { entry: entry('theirs', null), idempotencyKey: null })).rejects.toMatchObject({ statusCode: 409, data: { code: 'changed_meanwhile', theirs: { values: { said: 'mine' } } } })
    const seen = (await findTicket(scratch.db, ticket))!.checks[tag]!.operator!.at
    expect(await addEntry(scratch.db, technician(), ticket, { entry: entry('theirs', seen), idempotencyKey: null })).toBe(true)
  })
  it('write the tuning record, with the change number where the site asks for it', async () => {
    const { ticket, tag, id } = await worked()
    const entry = (changeNumber: string | null) => ({ kind: 'tuning' as const, tag, stage: 'asLeft' as const, tuning: { form: 'ideal', gain: 0.8 }, reason: 'less gain', changeNumber })
    await scratch.db('settings').insert({ key: 'changeNumberRequired', value: 'true' })
    await expect(addEntry(scratch.db, technician(), ticket, { entry: entry(null), idempotencyKey: null })).rejects.toMatchObject({ statusCode: 422 })
    await addEntry(scratch.db, technician(), ticket, { entry: entry('MOC-17'), idempotencyKey: null })
    await scratch.db('settings').where({ key: 'changeNumberRequired' }).delete()
    expect(await scratch.db('tuning_records').where({ loop_id: id }).first()).toMatchObject({ kind: 'asLeft', change_number: 'MOC-17', tuning: { form: 'ideal', gain: 0.8 } })
  })
})

describe('two people at once', () => {
  it('the second is refused and sees what the first did; nothing is lost', async () => {
    const { ticket } = await worked()
    const { version } = (await findTicket(scratch.db, ticket))!
    const both = await Promise.allSettled([
      changeTicket(scratch.db, engineer(), ticket, { version, title: 'one' }),
      changeTicket(scratch.db, engineer(), ticket, { version, title: 'other' }),
    ])
    expect(both.map(r => r.status).sort()).toEqual(['fulfilled', 'rejected'])
    const refused = both.find(r => r.status === 'rejected') as PromiseRejectedResult
    expect(refused.reason).toMatchObject({ statusCode: 409, data: { code: 'changed_meanwhile', theirs: { version: version + 1 } } })
  })
  it('a ticket in work is never without a person', async () => {
    const { ticket } = await worked()
    const { version } = (await findTicket(scratch.db, ticket))!
    await expect(changeTicket(scratch.db, engineer(), ticket, { version, assigneeId: null })).rejects.toMatchObject({ statusCode: 422, data: { code: 'needs_assignee' } })
  })
})

describe('mails at once', () => {
  it('are left out for people who turned them off', async () => {
    const { db } = scratch
    const tag = `FIC-${9000 + made++}`
    await addLoop(db, tag)
    await db('users').where({ id: accounts.technician.id }).update({ notify: JSON.stringify({ assignment: false, handBack: true, overdue: true }) })
    const ticket = await openTicket(db, engineer(), { tags: [tag], week: '2026-W40', assigneeId: accounts.technician.id })
    expect(await db('mails').where('key', 'like', `assignment-${ticket}-%`)).toHaveLength(0)
    await db('users').where({ id: accounts.technician.id }).update({ notify: JSON.stringify({ assignment: true, handBack: true, overdue: true }) })
    await changeTicket(db, engineer(), ticket, { version: 1, assigneeId: accounts.engineer.id })
    await changeTicket(db, engineer(), ticket, { version: 2, assigneeId: accounts.technician.id })
    expect((await db('mails').where('key', 'like', `assignment-${ticket}-%`)).map((m: any) => m.recipient)).toEqual(['technician@site.example'])
  })
})

describe('overdue', () => {
  it('is told once for each ticket and due date, not in the night, by the calendar of the site', async () => {
    const { db } = scratch
    const tag = `FIC-${9000 + made++}`
    await addLoop(db, tag)
    const ticket = await openTicket(db, engineer(), { tags: [tag], week: '2026-W40', assigneeId: accounts.technician.id, dueOn: '2026-07-10' })
    const mails = async () => db('mails').where('key', 'like', `overdue-${ticket}-%`)
    // 23:30 UTC on the 10th is half past midnight on the 11th in London in summer: due is past, but it is night
    await remindOverdue(db, new Date('2026-07-10T23:30:00Z'))
    expect(await mails()).toHaveLength(0)
    expect((await listTickets(db, { due: 'overdue' }, new Date('2026-07-10T23:30:00Z'))).rows.map(r => r.id)).toContain(ticket)
    expect((await listTickets(db, { due: 'overdue' }, new Date('2026-07-10T22:30:00Z'))).rows.map(r => r.id)).not.toContain(ticket)
    for (const hour of ['06', '07', '12']) await remindOverdue(db, new Date(`2026-07-11T${hour}:00:00Z`))
    expect((await mails()).map(m => m.recipient)).toEqual(['technician@site.example'])
    await changeTicket(db, engineer(), ticket, { version: 1, dueOn: '2026-07-20' })
    await remindOverdue(db, new Date('2026-07-21T12:00:00Z'))
    expect(await mails()).toHaveLength(2)
  })
})
