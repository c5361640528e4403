import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import type { BrowserContext, Page } from 'playwright-core'
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest'
import { openAs, openBrowser } from '../setup/browser'

const axe = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8')
let context: BrowserContext
let close: () => Promise<void>
const said: string[] = []

beforeAll(async () => {
  // the policy of the pages would refuse the checker's script
  ({ context, close } = await openBrowser({ bypassCSP: true }))
  context.on('console', (message) => { if (message.type() === 'error' && !/40[0-9]|422/.test(message.text())) said.push(message.text()) })
  context.on('weberror', error => said.push(error.error().message))
})
afterAll(() => close?.())

/** Violations of WCAG 2.2 A and AA that the checker finds. */
async function violations(page: Page): Promise<string[]> {
  await page.evaluate(axe)
  const { violations: found } = await page.evaluate(() => (window as any).axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] }))
  return found.map((v: any) => `${page.url()} ${v.id}: ${v.nodes.map((n: any) => n.target.join(' ')).join(', ')}`)
}

describe('signing in', () => {
  it('leads back to where one wanted to go, and a wrong password is said plainly', async () => {
    const { email, password } = inject('accounts').admin
    const page = await context.newPage()
    await page.goto(`${inject('baseUrl')}/admin/tokens`)
    await page.waitForURL('**/sign-in?next=/admin/tokens')
    expect(await violations(page)).toEqual([])
    await page.getByLabel('E-mail').fill(email)
    await page.getByLabel('Password').fill('not this one')
    await page.getByRole('button', { name: 'Sign in' }).click()
    await page.getByRole('alert').getByText('do not belong together').waitFor()
    await page.getByLabel('Password').fill(password)
    await page.getByRole('button', { name: 'Sign in' }).click()
    await page.waitForURL('**/admin/tokens')
    await page.close()
  })
  it('an invitation is followed from the mail to the first page', async () => {
    const page = await openAs(context, 'admin', '/admin/people')
    await page.getByRole('button', { name: 'Invite somebody' }).click()
    await page.getByLabel('E-mail').fill('kim@site.example')
    await page.getByLabel('Name').fill('Kim Sorrel')
    await page.getByRole('dialog').getByLabel('Role').selectOption('technician')
    await page.getByRole('button', { name: 'Send the invitation' }).click()
    await page.getByText('kim@site.example, invited, no password yet').waitFor()
    let link: string | undefined
    for (let tries = 0; tries < 40 && !link; tries++) {
      await page.goto(`${inject('baseUrl')}/admin/mail`)
      const mail = page.getByRole('button', { name: /Your account at Fettle.*kim@site\.example/ })
      if (await mail.first().waitFor({ timeout: 1000 }).then(() => true, () => false)) {
        await mail.first().click()
        link = /https?:\S+set-password#\S+/.exec(await page.locator('dialog pre').innerText())?.[0]
      }
    }
    const own = await openBrowser()
    const theirs = await own.context.newPage()
    await theirs.goto(link!)
    await theirs.getByText('Welcome, Kim Sorrel').waitFor()
    await theirs.getByLabel('New password').fill('short')
    await theirs.getByRole('button', { name: 'Set it and sign in' }).click()
    await theirs.getByText('must have at least 12 characters').waitFor()
    await theirs.getByLabel('New password').fill('stove pipe kettle')
    await theirs.getByRole('button', { name: 'Set it and sign in' }).click()
    await theirs.waitForURL(`${inject('baseUrl')}/`)
    await own.close()
    await page.close()
  })
})

describe('pages of people and administration', () => {
  for (const colorScheme of ['light', 'dark'] as const) {
    it(`have no accessibility fault that a program can find, ${colorScheme}`, async () => {
      const found: string[] = []
      const page = await openAs(context, 'admin', '/account')
      await page.emulateMedia({ colorScheme })
      for (const path of ['/account', '/admin/people', '/admin/tokens', '/admin/outages', '/admin/settings', '/admin/mail', '/admin/audit']) {
        await page.goto(inject('baseUrl') + path)
        await page.getByRole('heading', { level: 1 }).waitFor()
        found.push(...await violations(page))
      }
      await page.close()
      expect(found).toEqual([])
    })
  }
  it('fit a phone without sideways scrolling', async () => {
    const page = await openAs(context, 'admin', '/admin/people')
    await page.setViewportSize({ width: 390, height: 844 })
    for (const path of ['/account', '/admin/people', '/admin/tokens', '/admin/outages', '/admin/settings', '/admin/mail', '/admin/audit']) {
      await page.goto(inject('baseUrl') + path)
      await page.getByRole('heading', { level: 1 }).waitFor()
      expect([path, await page.evaluate('document.documentElement.scrollWidth')]).toEqual([path, 390])
    }
    await page.close()
  })
  it('are closed to others, who are told so', async () => {
    const other = await openBrowser()
    const page = await openAs(other.context, 'viewer', '/admin/people')
    await page.getByText('This page is for the role admin').waitFor()
    await other.close()
  })
  it('nothing went wrong in the console meanwhile', () => {
    expect(said).toEqual([])
  })
})
