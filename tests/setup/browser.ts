import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { chromium, type BrowserContext, type BrowserContextOptions, type Page } from 'playwright-core'
import { inject } from 'vitest'
import type { Role } from '../../shared/types/people'

const args = ['--no-sandbox', '--disable-gpu', '--disable-quic', '--no-first-run', '--disable-background-networking', '--disable-component-update', '--disable-sync']

/** A headless Chromium of one's own; `close()` in afterAll. */
export async function openBrowser(options: BrowserContextOptions = {}): Promise<{ context: BrowserContext, close: () => Promise<void> }> {
  const profile = mkdtempSync(join(tmpdir(), 'fettle-browser-'))
  const context = await chromium.launchPersistentContext(profile, { executablePath: '/usr/bin/chromium', headless: true, args, viewport: { width: 1440, height: 900 }, ...options })
  return {
    context,
    close: async () => {
      await context.close()
      rmSync(profile, { recursive: true, force: true })
    },
  }
}

/** Signs in through the API and opens a page of the application as that role. */
export async function openAs(context: BrowserContext, role: Role, path = '/'): Promise<Page> {
  const { email, password } = inject('accounts')[role]
  const answer = await context.request.post(`${inject('baseUrl')}/api/auth/sign-in`, { data: { email, password } })
  if (!answer.ok()) throw new Error(`Sign-in as ${role} answered ${answer.status()}`)
  const page = await context.newPage()
  await page.goto(inject('baseUrl') + path)
  return page
}
