/** The tuning desk in a real browser: a model from the data, the slider, own numbers, the sheet. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest'
import { openDatabase } from '../../../db/knex'
import { openAs, openBrowser } from '../../setup/browser'
import { tuningPlant, TUNING_WEEK } from '../../setup/tuningPlant'

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
let browser: { context: BrowserContext, close: () => Promise<void> }
let page: Page

async function broken(p: Page): Promise<string[]> {
  await p.evaluate(axeSource)
  return p.evaluate(async () => (await (window as any).axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] })).violations.map((v: any) => `${v.id}: ${v.nodes[0].html.slice(0, 160)}`))
}
const desk = (tag: string) => `/tuning/${tag}?week=${TUNING_WEEK}`
const lessThan = async (what: () => Promise<number>, limit: number) => { await expect.poll(async () => (await what()) < limit).toBe(true) }

beforeAll(async () => {
  const db = openDatabase(inject('databaseUrl'), { poolSize: 1 })
  try { await tuningPlant(db) }
  finally { await db.destroy() }
  browser = await openBrowser()
  page = await openAs(browser.context, 'engineer', desk('TIC-5501'))
})
afterAll(() => browser?.close())

describe('the tuning desk', () => {
  it('shows the standing cautions before anything else is done', async () => {
    const cautions = page.getByRole('list', { name: 'Cautions' })
    await cautions.waitFor()
    for (const words of ['management of change', 'Safety instrumented functions', 'Moderate steps', 'Local codes', 'Fettle never writes to a control system']) expect(await cautions.textContent()).toContain(words)
  })
  it('finds a model in the data and takes it', async () => {
    await page.getByRole('button', { name: 'Find a model in the data' }).click()
    await page.getByRole('region', { name: 'Stretches found' }).waitFor({ timeout: 60_000 })
    expect(await page.getByRole('checkbox', { name: /^Use the stretch/ }).count()).toBeGreaterThan(3)
    await page.getByRole('img', { name: /Fit over data.*PV by the model/ }).waitFor()
    await page.getByRole('button', { name: 'Use it: first order with dead time' }).click()
    await page.getByText('On the desk:').waitFor()
    // what was built in: 1.6 % per %, 400 s, 80 s
    expect(await page.getByText('On the desk:').locator('..').textContent()).toMatch(/gain 1\.[56]\d? % per %/)
    expect(await broken(page)).toEqual([])
  })
  it('answers the slider: more robust means a lower Ms and a smaller gain', async () => {
    const row = page.getByRole('row', { name: /SIMC PI/ }).first()
    const cell = async (k: number) => Number((await row.locator('td').nth(k).textContent())!.replace('−', '-'))
    const slider = page.getByRole('slider', { name: 'From more robust to faster' })
    await slider.focus()
    await page.keyboard.press('End')
    const [gain, ms] = [await cell(0), await cell(3)]
    await page.keyboard.press('Home')
    await lessThan(() => cell(0), gain)
    await lessThan(() => cell(3), ms)
    await page.keyboard.press('End')
  })
  it('compares with published settings when asked', async () => {
    await page.getByRole('button', { name: 'Show published settings for comparison' }).click()
    await page.getByRole('row', { name: /Cohen-Coon/ }).first().waitFor()
    await page.getByRole('button', { name: 'Hide the published settings' }).click()
  })
  it('tries own numbers, and cautions beyond a factor of 2', async () => {
    const own = page.getByRole('form', { name: 'Own numbers' })
    await own.getByLabel('Gain').fill('2.9')
    await own.getByRole('button', { name: 'Try own numbers' }).click()
    await page.getByText(/The gain changes by a factor of 2\.4/).waitFor()
    await page.getByRole('radio', { name: /SIMC PI/ }).first().check()
  })
  it('makes a sheet that holds as found, as proposed and the prediction, and prints on one page', async () => {
    const form = page.getByRole('form', { name: 'Change sheet' })
    await form.getByLabel(/Management-of-change number/).fill('MOC-2041')
    await form.getByRole('button', { name: 'Make the change sheet' }).click()
    await page.getByRole('button', { name: 'Open it' }).click()
    await page.waitForURL(/\/tuning\/sheet\/\d+/)
    const paper = page.getByRole('article')
    await paper.waitFor()
    for (const words of ['TIC-5501', 'MOC-2041', 'As found', 'As proposed', 'Expected IAE ratio', 'Stop when', 'Way back', 'Approved', 'permit to work']) expect(await paper.textContent()).toContain(words)
    expect(await broken(page)).toEqual([])
    const pdf = await page.pdf({ format: 'A4', margin: { top: '12mm', bottom: '12mm', left: '12mm', right: '12mm' } })
    expect(pdf.toString('latin1').match(/\/Type\s*\/Page[^s]/g)).toHaveLength(1)
  })
  it('lists the sheet on the desk', async () => {
    await page.goto(new URL(desk('TIC-5501'), page.url()).href)
    await page.getByRole('link', { name: /SIMC PI/ }).waitFor()
  })
  it('shows an on-off loop its own cycle', async () => {
    await page.goto(new URL(desk('TIC-5502'), page.url()).href)
    await page.getByRole('button', { name: 'Find a model in the data' }).click()
    await page.getByRole('button', { name: 'Use it: integrating with dead time' }).click({ timeout: 60_000 })
    await page.getByText('The week agrees with what band, dead time and lag make.').waitFor()
    expect(await broken(page)).toEqual([])
  })
  it('lets a viewer try numbers, and neither fit nor make a sheet', async () => {
    const other = await openBrowser()
    const viewer = await openAs(other.context, 'viewer', desk('TIC-5501'))
    await viewer.getByRole('button', { name: 'Type a model in' }).click()
    await viewer.getByRole('button', { name: 'Use these numbers' }).click()
    await viewer.getByRole('slider', { name: 'From more robust to faster' }).waitFor()
    expect(await viewer.getByRole('button', { name: 'Find a model in the data' }).count()).toBe(0)
    expect(await viewer.getByRole('button', { name: 'Make the change sheet' }).count()).toBe(0)
    await other.close()
  })
})
