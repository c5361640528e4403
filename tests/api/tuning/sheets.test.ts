/** Models and change sheets on a real database, without the web server. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { listTicketEvents } from '../../../db/repositories/tickets'
import { findLoop } from '../../../db/repositories/loops'
import { writeSetting } from '../../../db/repositories/settings'
import type { Refusal } from '../../../server/services/refusal'
import { openTicket } from '../../../server/services/tickets/openTicket'
import { findModel } from '../../../server/services/tuning/findModel'
import { makeSheet } from '../../../server/services/tuning/makeSheet'
import { listSheets, readSheet } from '../../../server/services/tuning/readSheets'
import fitModel from '../../../server/threads/fitModel'
import { findModelSchema, makeSheetSchema } from '../../../shared/schemas/tuning'
import { storedController } from '../../../shared/tuning/storedController'
import { makeAccounts, type Accounts } from '../../setup/accounts'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { TRUTH, tuningPlant, TUNING_WEEK } from '../../setup/tuningPlant'

let scratch: ScratchDatabase
let accounts: Accounts
const engineer = () => ({ userId: accounts.engineer.id, name: 'Engineer Test', role: 'engineer' as const })
const refusalOf = (work: Promise<unknown>): Promise<Refusal> => work.then(() => { throw new Error('was not refused') }, (e: Refusal) => e)

beforeAll(async () => {
  scratch = await scratchDatabase()
  accounts = await makeAccounts(scratch.db)
  await tuningPlant(scratch.db)
})
afterAll(() => scratch?.drop())

async function sheetInput(more: object = {}) {
  const loop = (await findLoop(scratch.db, 'TIC-5501'))!
  return makeSheetSchema.parse({
    version: loop.version, week: TUNING_WEEK, proposed: { ...storedController(loop)!, gain: 1.5 }, rule: 'SIMC PI', model: { origin: 'data', process: { kind: 'fopdt', ...TRUTH['TIC-5501'] }, fitPercent: 98 },
    reasons: 'lags behind', stopCriteria: ['PV leaves the band'], wayBack: 'as found', ...more,
  })
}

describe('findModel', () => {
  it('finds the model that is in the stored samples', async () => {
    const answer = await findModel(scratch.db, 'TIC-5501', findModelSchema.parse({ fromWeek: TUNING_WEEK, toWeek: TUNING_WEEK }), async task => fitModel(task))
    const fit = answer.joint!.fits.find(f => f.kind === 'fopdt')!
    expect(fit.status).toBe('ok')
    expect(Math.abs(fit.parameters.processGain!.value / TRUTH['TIC-5501'].processGain - 1)).toBeLessThan(0.1)
    expect(JSON.stringify(answer).length).toBeLessThan(1_000_000)
  })
  it('refuses a loop that is not there, and more than six weeks', async () => {
    const input = findModelSchema.parse({ fromWeek: '2026-W30', toWeek: TUNING_WEEK })
    expect(await refusalOf(findModel(scratch.db, 'NO-1', input))).toMatchObject({ statusCode: 404 })
    expect(await refusalOf(findModel(scratch.db, 'TIC-5501', input))).toMatchObject({ statusCode: 422, data: { code: 'invalid_input' } })
  })
})

describe('makeSheet', () => {
  it('keeps the sheet with its prediction, puts it on the ticket and into the audit trail', async () => {
    const ticket = await openTicket(scratch.db, engineer(), { tags: ['TIC-5501'], week: TUNING_WEEK })
    const { id, expectedIaeRatio } = await makeSheet(scratch.db, engineer(), 'TIC-5501', await sheetInput({ ticketId: ticket, changeNumber: 'MOC-17' }))
    expect(expectedIaeRatio).toBeGreaterThan(0.3)
    expect(expectedIaeRatio).toBeLessThan(1)
    const kept = await readSheet(scratch.db, id)
    expect(kept).toMatchObject({ tag: 'TIC-5501', ticketId: ticket, madeBy: 'Engineer Test', sheet: { changeNumber: 'MOC-17', asFound: { form: 'series', gain: 1.2 }, asProposed: { gain: 1.5 } } })
    const event = (await listTicketEvents(scratch.db, ticket)).find(e => e.kind === 'changeSheet')!
    expect(event.data).toMatchObject({ sheetId: id, tag: 'TIC-5501', expectedIaeRatio })
    expect(await scratch.db('audit').where({ action: 'changeSheet.make', entity_id: String(id) }).first()).toBeTruthy()
    expect((await listSheets(scratch.db, 'TIC-5501'))[0]).toMatchObject({ id, expectedIaeRatio })
  })
  it('refuses a set-up that was changed meanwhile, a ticket of another loop, an on-off loop, an unstable change', async () => {
    expect(await refusalOf(makeSheet(scratch.db, engineer(), 'TIC-5501', await sheetInput({ version: 99 })))).toMatchObject({ statusCode: 409, data: { code: 'changed_meanwhile' } })
    const other = await openTicket(scratch.db, engineer(), { tags: ['TIC-5502'], week: TUNING_WEEK })
    expect(await refusalOf(makeSheet(scratch.db, engineer(), 'TIC-5501', await sheetInput({ ticketId: other })))).toMatchObject({ statusCode: 422 })
    expect(await refusalOf(makeSheet(scratch.db, engineer(), 'TIC-5502', await sheetInput()))).toMatchObject({ statusCode: 409, data: { code: 'on_off' } })
    const loop = (await findLoop(scratch.db, 'TIC-5501'))!
    const unsafe = await refusalOf(makeSheet(scratch.db, engineer(), 'TIC-5501', await sheetInput({ proposed: { ...storedController(loop)!, gain: 60 } })))
    expect(unsafe).toMatchObject({ statusCode: 422, data: { code: 'unsafe_change' } })
    expect(await listSheets(scratch.db, 'TIC-5501')).toHaveLength(1)
  })
  it('asks for the management-of-change number where the site does', async () => {
    await writeSetting(scratch.db, 'changeNumberRequired', true)
    expect(await refusalOf(makeSheet(scratch.db, engineer(), 'TIC-5501', await sheetInput()))).toMatchObject({ statusCode: 422, data: { issues: [{ path: 'changeNumber' }] } })
    await writeSetting(scratch.db, 'changeNumberRequired', false)
  })
})
