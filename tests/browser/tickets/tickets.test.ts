/** A ticket from the table to its closed proof, by three people in three sessions, one of them on a phone without connection. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest'
import { weekOf } from '../../../shared/assessment/week/isoWeek'
import type { Role } from '../../../shared/types/people'
import { makeAccounts, type Accounts } from '../../setup/accounts'
import { openBrowser } from '../../setup/browser'
import { scratchDatabase, type ScratchDatabase } from '../../setup/scratchDatabase'
import { startApplication, type Application } from '../../setup/startApplication'
import { addLoop, addSamples, addWeek } from '../../setup/ticketPlant'

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
const DAY = 86_400_000
const TAG = 'FIC-2107'
const now = Date.now()
const week = weekOf(now - 7 * DAY, 'Europe/London')
// the smallest JPEG that has its marks; only its first bytes are looked at
const photo = Buffer.from('ffd8ffe000104a46494600010100000100010000ffd9', 'hex')

let scratch: ScratchDatabase
let accounts: Accounts
let application: Application
let loopId: number
const closers: (() => Promise<void>)[] = []

beforeAll(async () => {
  scratch = await scratchDatabase({ clusterUrl: inject('clusterUrl') })
  accounts = await makeAccounts(scratch.db)
  loopId = await addLoop(scratch.db, TAG)
  await addSamples(scratch.db, loopId, now - 8 * DAY, now, { sd: 2, seed: 1 })
  await addWeek(scratch.db, loopId, weekOf(now, 'Europe/London'), { lost: 60 })
  await addWeek(scratch.db, loopId, week, { lost: 60 })
  application = await startApplication({ databaseUrl: scratch.url })
})
afterAll(async () => {
  await Promise.allSettled(closers.map(close => close()))
  await application?.stop()
  await scratch?.drop()
})

async function session(role: Role, phone = false): Promise<{ context: BrowserContext, open: (path: string) => Promise<Page> }> {
  const { context, close } = await openBrowser(phone ? { viewport: { width: 390, height: 844 }, hasTouch: true, isMobile: true } : {})
  closers.push(close)
  const { email, password } = accounts[role]
  const answer = await context.request.post(`${application.baseUrl}/api/auth/sign-in`, { data: { email, password } })
  if (!answer.ok()) throw new Error(`Sign-in as ${role} answered ${answer.status()}`)
  return { context, open: async (path) => { const page = await context.newPage(); await page.goto(application.baseUrl + path); return page } }
}
async function broken(p: Page): Promise<string[]> {
  await p.evaluate(axeSource)
  return p.evaluate(async () => (await (window as any).axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] })).violations.map((v: any) => `${v.id}: ${v.nodes[0].html.slice(0, 160)}`))
}

describe('from the table to closed proof', () => {
  let ticket = 0
  let technician: Awaited<ReturnType<typeof session>>
  let phone: Page

  it('an engineer selects the loop in the table, opens a ticket and assigns it', async () => {
    const page = await (await session('engineer')).open(`/loops?week=${week}`)
    await page.getByRole('grid', { name: 'Loops' }).waitFor()
    await page.getByRole('checkbox', { name: new RegExp(TAG) }).first().check()
    await page.getByRole('toolbar', { name: 'Selected loops' }).getByRole('button', { name: 'Open a ticket' }).click()
    await page.waitForURL(/\/tickets\/new/)
    await page.getByText(`${TAG} of the test`).first().waitFor()
    expect(await broken(page)).toEqual([])
    await page.getByLabel('Assigned to').selectOption({ label: 'Technician Test (technician)' })
    await page.getByLabel('Note for the person who does it').fill('Look at the positioner first.')
    await page.getByRole('button', { name: 'Open the ticket' }).click()
    await page.waitForURL(/\/tickets\/\d+$/)
    ticket = Number(page.url().split('/').pop())
    await page.getByRole('heading', { name: `${TAG} hunts: sticking valve` }).waitFor()
    await page.getByText('Look at the positioner first.').waitFor()
    expect(await broken(page)).toEqual([])
  })

  it('the technician finds it in the own list on a phone and starts work', async () => {
    technician = await session('technician', true)
    phone = await technician.open('/tickets')
    await phone.getByRole('button', { name: 'only mine' }).waitFor()
    expect(await phone.getByRole('button', { name: 'only mine' }).getAttribute('aria-pressed')).toBe('true')
    expect(await broken(phone)).toEqual([])
    await phone.getByText(`${TAG} hunts: sticking valve`).click()
    await phone.getByRole('button', { name: 'Start work' }).click()
    await phone.getByRole('heading', { name: 'Ask the operator' }).waitFor()
    expect(await phone.evaluate(() => document.documentElement.scrollWidth <= window.innerWidth)).toBe(true)
    expect(await broken(phone)).toEqual([])
  })

  it('has targets of 48 px where work is done', async () => {
    const small = await phone.locator('main :is(button, textarea, label.btn, label.btn-primary)').evaluateAll(elements => elements.filter(e => !e.closest('.label, header') && e.getClientRects().length > 0 && e.getBoundingClientRect().height < 48 && !e.classList.contains('link') && !e.classList.contains('sr-only')).map(e => e.outerHTML.slice(0, 100)))
    expect(small).toEqual([])
  })

  it('works on without connection: entries are kept over a reload, shown as not sent, and sent later in order', async () => {
    // the program that keeps the pages must have taken over
    await phone.waitForFunction(() => navigator.serviceWorker.getRegistration().then(r => Boolean(r?.active)))
    await phone.reload()
    await phone.getByRole('heading', { name: 'Ask the operator' }).waitFor()
    await phone.waitForFunction(() => navigator.serviceWorker.controller !== null)
    await phone.waitForTimeout(1500)
    await technician.context.setOffline(true)

    await phone.getByLabel('What the operator said').fill('Hunts since Monday, worse at night')
    await phone.getByRole('button', { name: 'Save this check' }).click()
    await phone.getByText('1 entry is not sent yet.').waitFor()
    await phone.getByLabel('Mode as found').fill('AUTO')
    await phone.getByText('yes', { exact: true }).click()
    await phone.getByRole('button', { name: 'Save this check' }).click()
    await phone.getByText('2 entries are not sent yet.').waitFor()
    await phone.locator('input[type=file][capture]').setInputFiles({ name: 'positioner.jpg', mimeType: 'image/jpeg', buffer: photo })
    await phone.getByText('3 entries are not sent yet.').waitFor()

    await phone.reload()
    await phone.getByText('3 entries are not sent yet.').waitFor()
    await phone.getByText(/No connection\. This is the ticket as last seen/).waitFor()
    expect(await scratch.db('ticket_events').where({ ticket_id: ticket, kind: 'check' })).toHaveLength(0)

    await technician.context.setOffline(false)
    await phone.getByText('not sent yet').first().waitFor({ state: 'detached', timeout: 40_000 })
    const events = await scratch.db('ticket_events').where({ ticket_id: ticket }).whereIn('kind', ['check', 'file']).orderBy('id')
    expect(events.map((e: any) => e.data.checkId ?? e.text)).toEqual(['operator', 'mode', 'positioner.jpg'])
    expect(new Date(events[0].at).getTime()).toBeLessThan(new Date(events[2].at).getTime())
    await phone.getByAltText('positioner.jpg').waitFor()
  })

  it('computes the dead band as the figures come in, and hands back', async () => {
    await phone.getByRole('heading', { name: 'Valve: small steps in manual' }).waitFor()
    await phone.getByText('Small steps. Stop at the first sign of trouble', { exact: false }).waitFor()
    for (const [label, value] of [['Output at the first answer, going up', '51'], ['Highest output', '52'], ['Output at the first answer, going down', '49,5']]) {
      await phone.getByLabel(label, { exact: true }).fill(value)
      await phone.getByLabel(label, { exact: true }).blur()
    }
    await phone.getByText(/Dead band 2\.50? ?%/).waitFor()
    await phone.getByRole('button', { name: 'Save this check' }).click()
    await phone.getByLabel('What was done').fill('Packing loosened, positioner calibrated')
    await phone.getByRole('button', { name: 'Save this check' }).click()
    await phone.getByText('All checks are answered', { exact: false }).waitFor()
    await phone.getByRole('button', { name: 'Hand back to verify' }).click()
    await phone.getByText('The work is done.', { exact: false }).waitFor()
    const { checks } = await scratch.db('tickets').where({ id: ticket }).first()
    expect(checks[TAG].valveSteps.values).toMatchObject({ deadBand: 2.5, uncertainty: 0.5 })
  })

  it('shows an answer that somebody else gave meanwhile beside the own one, and loses neither', async () => {
    // back to work, then the same check is answered at a desk and, without connection, on the phone
    await scratch.db('tickets').where({ id: ticket }).update({ state: 'inWork', version: scratch.db.raw('version + 1') })
    await phone.reload()
    await phone.getByRole('button', { name: /Ask the operator/ }).click()
    await technician.context.setOffline(true)
    await phone.getByLabel('What the operator said').fill('Mine')
    await phone.getByRole('button', { name: 'Save this check' }).click()
    await phone.getByText('1 entry is not sent yet.').waitFor()
    const desk = await session('admin')
    const answer = await desk.context.request.post(`${application.baseUrl}/api/tickets/${ticket}/entries`, { data: { entry: { kind: 'check', checkId: 'operator', tag: TAG, values: { said: 'Theirs' } } } })
    expect(answer.status()).toBe(201)
    await technician.context.setOffline(false)
    await phone.getByText('This entry was not taken.', { exact: false }).waitFor({ timeout: 40_000 })
    await phone.getByText('said Theirs').waitFor()
    expect(await broken(phone)).toEqual([])
    await phone.getByRole('button', { name: 'Put mine in its place' }).click()
    await expect.poll(async () => (await scratch.db('tickets').where({ id: ticket }).first()).checks[TAG].operator.values.said, { timeout: 20_000 }).toBe('Mine')
    await phone.getByRole('button', { name: 'Hand back to verify' }).click()
    await phone.getByText('The work is done.', { exact: false }).waitFor()
  })

  it('a third person compares before and after and closes it on the proof', async () => {
    // the week after the work, as a later upload would bring it
    const { work_done_at: done } = await scratch.db('tickets').where({ id: ticket }).first()
    await addSamples(scratch.db, loopId, new Date(done).getTime() + 60_000, now + 7 * DAY, { sd: 1, seed: 2 })
    await addWeek(scratch.db, loopId, weekOf(now + 7 * DAY, 'Europe/London'), { lost: 4, verdict: 'steady' })
    const page = await (await session('admin')).open(`/tickets/${ticket}`)
    const proof = page.locator('[data-test=proof]')
    await proof.getByText('Better, provisional', { exact: false }).waitFor({ timeout: 30_000 })
    await proof.getByText(/the mean error is 5\d % of what it was|the mean error is 4\d % of what it was/).waitFor()
    await proof.locator('.apexcharts-canvas').first().waitFor()
    expect(await broken(page)).toEqual([])
    await page.getByRole('radio', { name: 'not a problem' }).check()
    await page.getByRole('radio', { name: 'valve repaired' }).check()
    await page.getByRole('button', { name: 'Close the ticket' }).click()
    await page.getByText('Closed. Fettle watches the loop', { exact: false }).waitFor()
    expect(await scratch.db('tickets').where({ id: ticket }).first()).toMatchObject({ state: 'closed', outcome: 'valveRepaired', closed_by: accounts.admin.id })
    const people = await scratch.db('ticket_events').where({ ticket_id: ticket }).distinct('user_id')
    expect(people.map((p: any) => p.user_id).sort()).toEqual([accounts.engineer.id, accounts.technician.id, accounts.admin.id].sort())
  })

  it('shows the hours won back, provisional ones apart', async () => {
    const page = await (await session('viewer')).open('/benefit')
    await page.getByText('more are provisional', { exact: false }).waitFor()
    await page.getByRole('link', { name: `T-${ticket}` }).waitFor()
    expect(await broken(page)).toEqual([])
  })
})

describe('the plan of a ticket', () => {
  it('shows both versions when somebody was quicker, and keeps what was typed', async () => {
    const { id } = await scratch.db('loops').where({ tag: TAG }).first('id')
    expect(id).toBe(loopId)
    const engineer = await session('engineer')
    const made = await (await engineer.context.request.post(`${application.baseUrl}/api/tickets`, { data: { tags: [TAG], week } })).json()
    const page = await engineer.open(`/tickets/${made.id}`)
    await page.getByLabel('Title').fill('My title')
    const other = await session('admin')
    await other.context.request.patch(`${application.baseUrl}/api/tickets/${made.id}`, { data: { version: 1, title: 'Their title', priority: 1 } })
    await page.getByRole('button', { name: 'Save the plan' }).click()
    const conflict = page.locator('[data-test=conflict]')
    await conflict.getByText('Their title').waitFor()
    await conflict.getByText('My title').waitFor()
    await page.getByRole('button', { name: 'Save my changes over it' }).click()
    await expect.poll(async () => (await scratch.db('tickets').where({ id: made.id }).first()).title).toBe('My title')
  })
})

describe('the digest', () => {
  it('is previewed, sent after asking, listed with its outcome, and stopped only by a press', async () => {
    const engineer = await session('engineer')
    const page = await engineer.open(`/digest?week=${week}`)
    await page.frameLocator('iframe').getByText('lost', { exact: false }).first().waitFor()
    await page.getByLabel('Send me the digest').check()
    await page.getByRole('button', { name: 'Save' }).click()
    await page.getByText('engineer@site.example, the whole plant').waitFor()
    expect(await broken(page)).toEqual([])
    await page.getByRole('button', { name: 'Text', exact: true }).click()
    await page.locator('pre').getByText('loop-hours', { exact: false }).waitFor()
    await page.getByRole('button', { name: 'Send this week’s digest now' }).click()
    await page.getByRole('button', { name: 'Send it' }).click()
    await expect.poll(async () => scratch.db('mails').where({ kind: 'digest' }).first('status'), { timeout: 20_000 }).toMatchObject({ status: 'sent' })
    await page.reload()
    await page.getByLabel('Mails of the digest').getByText('sent', { exact: true }).waitFor()

    const { unsubscribe_token: token } = await scratch.db('digest_subscriptions').first()
    const nobody = await openBrowser()
    closers.push(nobody.close)
    const stop = await nobody.context.newPage()
    await stop.goto(`${application.baseUrl}/u/${token}`)
    await stop.getByRole('button', { name: 'Stop it' }).waitFor()
    expect((await scratch.db('digest_subscriptions').first()).active).toBe(true)
    expect(await broken(stop)).toEqual([])
    await stop.getByRole('button', { name: 'Stop it' }).click()
    await stop.getByRole('heading', { name: 'The digest is stopped' }).waitFor()
    expect((await scratch.db('digest_subscriptions').first()).active).toBe(false)
  })
})
