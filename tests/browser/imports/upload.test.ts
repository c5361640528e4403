/** From a historian's export to a ranked loop and its trend, in a real browser, by the worker that runs beside it. */
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { createRequire } from 'node:module'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readOptions, simulateExport } from '../../../scripts/simulate'
import { openAs, openBrowser } from '../../setup/browser'

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
const folder = mkdtempSync(join(tmpdir(), 'fettle-upload-'))
const WEEK = '2026-W40'
let browser: { context: BrowserContext, close: () => Promise<void> }
let page: Page

async function broken(p: Page): Promise<string[]> {
  await p.evaluate(axeSource)
  return p.evaluate(async () => (await (window as any).axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] })).violations.map((v: any) => `${v.id}: ${v.nodes[0].html.slice(0, 120)}`))
}

beforeAll(async () => {
  await simulateExport(readOptions(['--loops', '8', '--days', '2', '--interval', '20', '--seed', '11', '--mix', 'balanced', '--week', WEEK, '--out', join(folder, 'week.csv')]))
  browser = await openBrowser()
  page = await openAs(browser.context, 'engineer', '/imports')
})
afterAll(async () => {
  await browser?.close()
  rmSync(folder, { recursive: true, force: true })
})

describe('an upload through the browser', () => {
  let tags: string[] = []

  it('asks about loops that it does not know, then reads, assesses and says what came in', async () => {
    await page.locator('input[aria-label="Historian exports"]').setInputFiles(join(folder, 'week.csv'))
    await page.waitForURL(/\/imports\/\d+/)
    await page.getByRole('button', { name: /Go on with 8 new loops/ }).click()
    await page.getByText('Ranked loops of 2026-W40').waitFor({ timeout: 90_000 })
    expect(await page.locator('h1').textContent()).toMatch(/week\.csv is in: .* values of 8 loops/)
    expect(await broken(page)).toEqual([])
  })

  it('takes the loop list, and says what it changed', async () => {
    await page.goto(new URL('/imports', page.url()).href)
    await page.locator('input[aria-label="Loop list"]').setInputFiles(join(folder, 'week.loops.csv'))
    await page.getByText(/8 rows; 0 created, 8 changed/).waitFor()
    expect(await page.getByText('Columns that Fettle does not know').count()).toBe(0)
  })

  it('shows the ranked loops of the week that was uploaded', async () => {
    await page.goto(new URL(`/loops?week=${WEEK}`, page.url()).href)
    await page.getByRole('grid', { name: 'Loops' }).waitFor()
    tags = await page.locator('[role=rowheader] a').allTextContents()
    expect(tags).toHaveLength(8)
  })

  it('opens a loop: sentence, week, evidence, figures with how they are made', async () => {
    await page.getByRole('link', { name: tags[0]!, exact: true }).click()
    await page.waitForURL(new RegExp(`/loops/${tags[0]}`))
    await page.getByRole('heading', { name: 'Figures of the week' }).waitFor()
    expect(await page.locator('h1').textContent()).toContain(tags[0])
    await page.locator('dt', { hasText: 'Coverage' }).locator('xpath=..').getByRole('button').click()
    const dialog = page.locator('dialog[open]')
    expect(await dialog.textContent()).toMatch(/How coverage is computed.*Source.*Window.*Samples used/s)
    await dialog.getByRole('button', { name: 'Close' }).click()
  })

  it('draws the trend and fetches finer data for the stretch that is dragged over; Escape goes back', async () => {
    const plot = page.locator('figure[aria-label^="Trend"]')
    await plot.locator('svg.apexcharts-svg').first().waitFor()
    expect(await plot.locator('.apexcharts-line-series path').first().getAttribute('d')).toMatch(/^M.*L/)
    const area = (await plot.locator('.apexcharts-grid').first().boundingBox())!
    const finer = page.waitForRequest(r => r.url().includes('/trend?'))
    await page.mouse.move(area.x + area.width * 0.05, area.y + area.height / 2)
    await page.mouse.down()
    await page.mouse.move(area.x + area.width * 0.15, area.y + area.height / 2, { steps: 6 })
    await page.mouse.up()
    const asked = new URL((await finer).url()).searchParams
    expect(Date.parse(asked.get('to')!) - Date.parse(asked.get('from')!)).toBeLessThan(24 * 3_600_000)
    await plot.getByRole('button', { name: 'Whole week' }).waitFor()
    await plot.focus()
    await page.keyboard.press('Escape')
    await expect.poll(() => plot.getByRole('button', { name: 'Whole week' }).count()).toBe(0)
  })

  it('goes to the next loop and back by keys, and keeps the accessibility rules', async () => {
    // the loop list had the weeks assessed again, so the rank is another by now: look at it as it is
    await page.reload()
    await page.getByRole('heading', { name: 'Figures of the week' }).waitFor()
    await page.getByRole('link', { name: /^\d+ of \d+/ }).waitFor()
    const here = page.url()
    const [there, back] = await page.getByRole('link', { name: /^The next loop/ }).count() ? ['j', 'k'] as const : ['k', 'j'] as const
    await page.locator('body').press(there)
    await page.waitForURL(url => url.href !== here)
    const next = decodeURIComponent(new URL(page.url()).pathname.split('/').at(-1)!)
    await page.locator('h1', { hasText: next }).waitFor()
    await page.getByRole('link', { name: back === 'k' ? /^The loop before/ : /^The next loop/ }).waitFor()
    await page.locator('body').press(back)
    await page.waitForURL(here)
    await page.getByRole('heading', { name: 'Figures of the week' }).waitFor()
    expect(await broken(page)).toEqual([])
  })

  it('changes the set-up of a loop and has its weeks assessed again', async () => {
    await page.getByRole('button', { name: 'Change the set-up' }).click()
    await page.getByLabel('Priority (1 weighs three times)').selectOption('1')
    await page.getByLabel('Description').fill('changed by hand')
    await page.getByRole('button', { name: 'Save', exact: true }).click()
    await page.getByText(/Saved\. One week is being assessed again|Saved\./).first().waitFor()
    await page.getByText('changed by hand').first().waitFor()
  })

  it('sets a loop aside with a reason, so that it leaves the ranking but stays in sight', async () => {
    const tag = decodeURIComponent(new URL(page.url()).pathname.split('/').at(-1)!)
    await page.getByRole('button', { name: 'Set aside…' }).click()
    await page.getByLabel('Not a problem, because').fill('known and agreed')
    await page.getByRole('button', { name: 'Set aside', exact: true }).click()
    await page.getByText(/Set aside until .* known and agreed/).waitFor()
    await page.goto(new URL(`/loops?week=${WEEK}`, page.url()).href)
    await page.getByRole('grid', { name: 'Loops' }).waitFor()
    expect((await page.locator('[role=rowheader] a').allTextContents()).at(-1)).toBe(tag)
  })
})
