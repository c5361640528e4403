/** The fleet table, the plant page and the shell in a real browser, driven by pointer and by keys. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { openAs, openBrowser } from '../../setup/browser'
import { FLEET_WEEK, FLEET_WEEK_BEFORE } from '../../setup/fleetWeeks'

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
let browser: { context: BrowserContext, close: () => Promise<void> }
let page: Page
const tagsOf = (p: Page) => p.locator('[role=rowheader] a').allTextContents()
const loaded = (p: Page) => p.getByRole('grid', { name: 'Loops' }).waitFor()

/** WCAG 2.2 A and AA by axe-core; answers the rules that are broken. */
async function broken(p: Page): Promise<string[]> {
  await p.evaluate(axeSource)
  return p.evaluate(async () => (await (window as any).axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] })).violations.map((v: any) => `${v.id}: ${v.nodes[0].html.slice(0, 120)}`))
}

beforeAll(async () => {
  browser = await openBrowser()
  page = await openAs(browser.context, 'engineer', `/loops?week=${FLEET_WEEK}`)
  await loaded(page)
})
afterAll(() => browser?.close())

describe('the fleet table', () => {
  it('opens with a sentence and the worst loop first', async () => {
    expect(await page.locator('h1').textContent()).toMatch(/^\d+ of \d+ loops lost more than 20 hours/)
    const weighted = (await page.locator('[role=row] [role=gridcell]:nth-child(5)').allTextContents()).map(Number)
    expect(weighted.length).toBeGreaterThan(5)
    expect(weighted).toEqual([...weighted].sort((a, b) => b - a))
  })

  it('sorts by a column and by a second one with Shift; the URL carries it and a reload keeps it', async () => {
    await page.getByRole('button', { name: /^Lost, h/ }).click()
    await page.waitForURL(/sort=-lostHours/)
    await page.getByRole('button', { name: /^Loop/ }).click({ modifiers: ['Shift'] })
    await page.waitForURL(/sort=-lostHours,tag|sort=-lostHours%2Ctag/)
    const lost = async () => (await page.locator('[role=row] [role=gridcell]:nth-child(4)').allTextContents()).map(Number)
    await expect.poll(async () => { const l = await lost(); return String(l) === String([...l].sort((a, b) => b - a)) }).toBe(true)
    await page.reload()
    await loaded(page)
    expect(await page.getByRole('columnheader', { name: /Lost, h/ }).getAttribute('aria-sort')).toBe('descending')
    expect(await page.getByRole('columnheader', { name: /^Loop/ }).getAttribute('aria-sort')).toBe('ascending')
  })

  it('filters by state, area and words; chips take filters out again', async () => {
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}`)
    await loaded(page)
    await page.getByRole('button', { name: /^hunting/ }).click()
    await page.waitForURL(/state=hunting/)
    await expect.poll(() => tagsOf(page)).not.toContain('FIC-3105')
    await page.keyboard.press('/')
    expect(await page.evaluate(() => document.activeElement?.getAttribute('type'))).toBe('search')
    await page.keyboard.type('tic-11')
    await expect.poll(() => tagsOf(page)).toEqual(['TIC-1102'])
    expect(await page.locator('h1').textContent()).toContain('1 of 1 loop shown')
    await page.getByRole('button', { name: 'Clear all' }).click()
    await expect.poll(async () => (await tagsOf(page)).length).toBeGreaterThan(10)
    await page.getByRole('searchbox').fill('no such loop')
    await page.getByText('No loop fits all of these filters.').waitFor()
    await page.getByRole('button', { name: 'Clear the filters' }).click()
    await loaded(page)
  })

  it('is worked by keys: arrows, Space, Enter', async () => {
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}`)
    await loaded(page)
    const tags = await tagsOf(page)
    await page.getByRole('grid', { name: 'Loops' }).focus()
    await page.keyboard.press('ArrowDown')
    await page.keyboard.press('ArrowDown')
    await page.keyboard.press('Space')
    await page.getByText('1 loop selected').waitFor()
    await page.keyboard.press('Enter')
    await page.waitForURL(url => url.pathname === `/loops/${tags[1]}` && url.searchParams.get('week') === FLEET_WEEK)
    await page.goBack()
    await loaded(page)
  })

  it('opens a ticket for the selected loops', async () => {
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}`)
    await loaded(page)
    await page.getByRole('checkbox', { name: 'Select FIC-2101' }).click()
    await page.getByRole('checkbox', { name: 'Select FIC-2102' }).click()
    await page.getByRole('button', { name: 'Open a ticket' }).click()
    await page.waitForURL(url => url.pathname === '/tickets/new' && url.searchParams.get('loops') === 'FIC-2101,FIC-2102')
    await page.goBack()
    await loaded(page)
  })

  it('shows the columns that were chosen, on the next visit too, and the CSV has just those', async () => {
    await page.getByRole('button', { name: 'Columns' }).click()
    await page.getByRole('checkbox', { name: 'Coverage, %' }).check()
    await page.keyboard.press('Escape')
    await page.reload()
    await loaded(page)
    expect(await page.getByRole('columnheader', { name: /Coverage/ }).count()).toBe(1)
    const link = await page.getByRole('link', { name: 'CSV' }).getAttribute('href')
    const csv = await (await page.context().request.get(new URL(link!, page.url()).href)).text()
    expect(csv.split('\r\n')[0]).toMatch(/^tag,description,.*coverage$/)
    expect(csv.trim().split('\r\n').slice(1).map(line => line.split(',')[0])).toEqual(await tagsOf(page))
    await page.getByRole('button', { name: 'Columns' }).click()
    await page.getByRole('button', { name: 'The usual columns' }).click()
    await page.keyboard.press('Escape')
  })

  it('saves a view and comes back to it', async () => {
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}&verdict=saturated`)
    await loaded(page)
    await page.getByRole('button', { name: /^Views/ }).click()
    await page.getByPlaceholder('Monday review').fill('At the limit')
    await page.getByRole('button', { name: 'Save the view' }).click()
    await page.getByText('Saved as “At the limit”.').waitFor()
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}`)
    await loaded(page)
    await page.getByRole('button', { name: /^Views/ }).click()
    await page.getByRole('button', { name: 'At the limit', exact: true }).click()
    await expect.poll(() => tagsOf(page)).toEqual(['LIC-2301'])
  })

  it('tells hour, state and figure under the pointer', async () => {
    await page.goto(page.url().split('?')[0] + `?week=${FLEET_WEEK}&search=FIC-2101`)
    await expect.poll(() => tagsOf(page)).toEqual(['FIC-2101'])
    const strip = page.locator('[role=grid] canvas').first()
    expect(await strip.getAttribute('aria-label')).toBe('168 hours, 20 lost: 20 hunting; 148 steady.')
    const box = (await strip.boundingBox())!
    await page.mouse.move(box.x + (box.width * 16.5) / 168, box.y + 8)
    await page.getByText('hunting, hour 3 of 10 at a stretch').waitFor()
    expect(await page.getByText(/period 38 min/).count()).toBeGreaterThan(0)
  })

  it('draws only the rows in sight of 2,000 and scrolls to the last', async () => {
    const other = await openAs(browser.context, 'engineer', '/')
    await other.route('**/api/loops?*', async (route) => {
      const answer = await (await route.fetch()).json()
      const rows = Array.from({ length: 2000 }, (_, i) => ({ ...answer.rows[i % answer.rows.length], tag: `FIC-${10000 + i}` }))
      await route.fulfill({ json: { ...answer, rows, total: 2000 } })
    })
    await other.goto(`${new URL(other.url()).origin}/loops?week=${FLEET_WEEK}`)
    await loaded(other)
    expect(await other.locator('[role=rowheader]').count()).toBeLessThan(50)
    await other.getByRole('grid', { name: 'Loops' }).focus()
    await other.keyboard.press('End')
    await other.getByText('FIC-11999').waitFor()
    expect(await other.locator('[role=rowheader]').count()).toBeLessThan(50)
    await other.close()
  })

  it('offers no selection to a viewer', async () => {
    const context = await openBrowser()
    const viewer = await openAs(context.context, 'viewer', `/loops?week=${FLEET_WEEK}`)
    await loaded(viewer)
    expect(await viewer.getByRole('checkbox', { name: /^Select/ }).count()).toBe(0)
    await context.close()
  })
})

describe('the plant page', () => {
  it('stacks the areas, tells who lost selected hours, and leads to the filtered table', async () => {
    await page.goto(`${new URL(page.url()).origin}/?week=${FLEET_WEEK}`)
    const kilns = page.getByRole('region', { name: 'Kilns' })
    await kilns.waitFor()
    expect(await page.locator('h1').textContent()).toContain('In Kilns, 6 of 6 loops were upset at once')
    const box = (await kilns.locator('canvas').boundingBox())!
    const x = (hour: number) => box.x + (box.width * (hour + 0.5)) / 168
    await page.mouse.move(x(60), box.y + 4)
    await page.mouse.down()
    await page.mouse.move(x(63), box.y + 4, { steps: 3 })
    await page.mouse.up()
    await page.getByText(/24 hours lost by 6 loops|hours lost by \d+ loops/).waitFor()
    expect(await page.getByRole('status').first().textContent()).toContain('Kilns 24 h')
    await kilns.getByRole('link', { name: 'Kilns' }).click()
    await page.waitForURL(url => url.pathname === '/loops' && url.searchParams.get('area') === 'Kilns')
    await loaded(page)
    expect((await tagsOf(page)).every(t => t.startsWith('TIC-11'))).toBe(true)
  })
  it('goes to the week before and stays there on the next page', async () => {
    await page.goto(`${new URL(page.url()).origin}/`)
    await page.getByRole('button', { name: /^Week before/ }).click()
    await page.waitForURL(url => url.searchParams.get('week') === FLEET_WEEK_BEFORE)
    await page.getByRole('link', { name: 'Loops', exact: true }).first().click()
    await page.waitForURL(url => url.pathname === '/loops' && url.searchParams.get('week') === FLEET_WEEK_BEFORE)
  })
  it('reads hour by hour with the keys', async () => {
    await page.goto(`${new URL(page.url()).origin}/?week=${FLEET_WEEK}`)
    const canvas = page.getByRole('region', { name: 'Kilns' }).locator('canvas')
    await canvas.focus()
    for (const key of ['PageDown', 'PageDown', ...Array<string>(12).fill('ArrowRight')]) await page.keyboard.press(key)
    await expect.poll(() => page.getByRole('region', { name: 'Kilns' }).locator('[aria-live]').textContent()).toMatch(/Wed 18 Nov, 12:00 to 13:00, off target/)
  })
})

describe('the shell', () => {
  it('keeps the theme that was chosen, and helps with keys', async () => {
    await page.goto(`${new URL(page.url()).origin}/`)
    await page.getByRole('button', { name: /Engineer Test/ }).first().click()
    await page.getByRole('radio', { name: 'dark' }).check()
    await page.reload()
    await page.locator('h1').waitFor()
    expect(await page.evaluate(() => document.documentElement.dataset.theme)).toBe('dark')
    await page.evaluate(() => localStorage.setItem('fettle.theme', 'light'))
    await page.keyboard.press('?')
    await page.getByRole('dialog', { name: 'Keys on this page' }).waitFor()
    await page.keyboard.press('Escape')
  })
  it('says what to do when the server does not answer', async () => {
    await page.route('**/api/plant*', route => route.abort())
    await page.goto(`${new URL(page.url()).origin}/?week=${FLEET_WEEK}`)
    await page.getByText('The server does not answer.').first().waitFor()
    await page.unroute('**/api/plant*')
    await page.getByRole('button', { name: 'Try again' }).click()
    await page.getByRole('region', { name: 'Kilns' }).waitFor()
  })
  it.each([['/', 'light', 1440], ['/', 'dark', 390], ['/loops', 'dark', 1440], ['/loops', 'light', 390]] as const)('%s in %s at %d px breaks no rule of WCAG 2.2 AA', async (path, scheme, width) => {
    const own = await openBrowser({ viewport: { width, height: 860 }, colorScheme: scheme })
    const p = await openAs(own.context, 'engineer', `${path}?week=${FLEET_WEEK}`)
    await p.locator('h1').waitFor()
    expect(await p.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)).toBeLessThanOrEqual(0)
    expect(await broken(p)).toEqual([])
    await own.close()
  })
})
