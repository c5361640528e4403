import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer } from '../setup/apiServer'
import { startApplication } from '../setup/startApplication'

let server: ApiServer
beforeAll(async () => { server = await startApiServer() })
afterAll(() => server?.stop())

/** Waits for the mail that carries a link and answers the link's token. */
async function linkFor(email: string): Promise<string> {
  for (let tries = 0; tries < 100; tries++) {
    const rows = await server.db('mails').where('recipient', email).where('status', 'sent').orderBy('id', 'desc')
    const token = rows[0] && /set-password#(\S+)/.exec(rows[0].text)?.[1]
    if (token) return token
    await new Promise(resolve => setTimeout(resolve, 100))
  }
  throw new Error(`No mail with a link came for ${email}.`)
}

describe('sign-in', () => {
  it('sets a cookie that scripts cannot read and other sites do not get; me tells who', async () => {
    const { answer, call } = await server.signIn('Engineer@Site.example', server.accounts.engineer.password)
    expect(answer.status).toBe(200)
    const cookie = answer.headers.getSetCookie().at(-1)!
    expect(cookie).toMatch(/HttpOnly/i)
    expect(cookie).toMatch(/SameSite=Lax/i)
    expect((await call('GET', '/api/auth/me')).body).toMatchObject({ person: { email: 'engineer@site.example', role: 'engineer' }, site: { demo: false } })
  })
  it('wrong password, unknown address, disabled, not set and demo account get one and the same answer', async () => {
    const password = server.accounts.viewer.password
    await server.db('users').insert([
      { email: 'gone@site.example', name: 'Gone', role: 'admin', password_hash: (await server.db('users').first('password_hash')).password_hash, disabled_at: new Date() },
      { email: 'new@site.example', name: 'New', role: 'viewer' },
      { email: 'demo@site.example', name: 'Demo', role: 'admin', demo: true, password_hash: (await server.db('users').first('password_hash')).password_hash },
    ])
    const answers = [
      await server.signIn('viewer@site.example', 'not the password'), await server.signIn('nobody@site.example', password), await server.signIn('gone@site.example', password),
      await server.signIn('new@site.example', password), await server.signIn('demo@site.example', password),
    ]
    for (const { answer } of answers) {
      expect(answer.status).toBe(401)
      expect(answer.body).toEqual(answers[0].answer.body)
      expect(answer.headers.getSetCookie()).toEqual([])
    }
    expect(answers[0].answer.body).toMatchObject({ statusCode: 401, statusMessage: 'Unauthorized', message: expect.stringMatching(/\.$/), data: { code: 'wrong_credentials' } })
  })
  it('guessing stops after ten tries with 429, also with the right password then', async () => {
    await server.db('users').insert({ email: 'target@site.example', name: 'Target', role: 'viewer', password_hash: (await server.db('users').first('password_hash')).password_hash })
    await server.db('sign_in_attempts').insert(Array.from({ length: 10 }, () => ({ email: 'email target@site.example' })))
    const { answer } = await server.signIn('target@site.example', server.accounts.viewer.password)
    expect([answer.status, answer.headers.get('retry-after')]).toEqual([429, '900'])
    await server.db('sign_in_attempts').where('email', 'email target@site.example').update({ at: new Date(Date.now() - 16 * 60_000) })
    expect((await server.signIn('target@site.example', server.accounts.viewer.password)).answer.status).toBe(200)
  })
  it('what a caller says of its own network address is believed of a trusted proxy alone, and then only the word of that proxy', async () => {
    const tired = '203.0.113.9'
    await server.db('sign_in_attempts').insert(Array.from({ length: 100 }, () => ({ email: `network ${tired}` })))
    const status = async (at: ApiServer, forwarded: string) => (await at.call('POST', '/api/auth/sign-in', { email: 'nobody@site.example', password: 'wrong' }, { 'x-forwarded-for': forwarded })).status
    expect(await status(server, tired)).toBe(401)
    const behindProxy = await startApplication({ databaseUrl: server.databaseUrl, env: { TRUST_PROXY: 'on' }, worker: false })
    try {
      const proxied = { ...server, call: (method: string, path: string, body?: unknown, headers?: Record<string, string>) => fetch(behindProxy.baseUrl + path, { method, body: JSON.stringify(body), headers }) } as unknown as ApiServer
      expect(await status(proxied, `198.51.100.1, ${tired}`)).toBe(429)
      expect(await status(proxied, `${tired}, 198.51.100.1`)).toBe(401)
    }
    finally { await behindProxy.stop() }
  })
  it('bad input is 422 with the fields', async () => {
    const answer = await server.call('POST', '/api/auth/sign-in', { email: '' })
    expect(answer.status).toBe(422)
    expect(answer.body.data).toMatchObject({ code: 'invalid_input', issues: expect.arrayContaining([{ path: 'email', message: expect.any(String) }, { path: 'password', message: expect.any(String) }]) })
  })
})

describe('sessions', () => {
  it('sign-out ends the session on the server: the old cookie is worth nothing', async () => {
    const { call } = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    expect((await call('POST', '/api/auth/sign-out')).status).toBe(200)
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
  })
  it('a new sign-in has a new id, even when the old cookie comes along', async () => {
    const first = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    const again = await first.call('POST', '/api/auth/sign-in', { email: 'viewer@site.example', password: server.accounts.viewer.password })
    expect(again.headers.getSetCookie().at(-1)!.split(';')[0]).not.toBe(first.cookie)
    expect((await first.call('GET', '/api/auth/me')).status).toBe(401)
  })
  it('ends after its absolute and its idle limit', async () => {
    const { call } = await server.signIn('technician@site.example', server.accounts.technician.password)
    const mine = () => server.db('sessions').where('user_id', server.accounts.technician.id)
    await mine().update({ last_seen_at: new Date(Date.now() - 4 * 86_400_000) })
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
    await mine().update({ last_seen_at: new Date(), expires_at: new Date(Date.now() - 1000) })
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
  })
  it('a made-up or altered cookie is nobody', async () => {
    expect((await server.call('GET', '/api/auth/me', undefined, { cookie: 'fettle-session=Fe26.2**x' })).status).toBe(401)
    const { cookie } = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    expect((await server.call('GET', '/api/auth/me', undefined, { cookie: `${cookie.slice(0, -3)}abc` })).status).toBe(401)
  })
  it('the session is not accepted in a header, only in the cookie', async () => {
    const { cookie } = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    expect((await server.call('GET', '/api/auth/me', undefined, { 'x-fettle-session-session': cookie.split('=')[1]! })).status).toBe(401)
  })
  it('the database holds neither session ids nor tokens nor passwords in the clear', async () => {
    const { cookie } = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    for (const { id_hash } of await server.db('sessions').select('id_hash')) {
      expect(id_hash).toMatch(/^[0-9a-f]{64}$/)
      expect(cookie).not.toContain(id_hash)
    }
  })
})

describe('requests from other sites', () => {
  it('are refused when they would change something, with the cookie or without', async () => {
    const admin = await server.as('admin')
    for (const headers of [{ origin: 'https://evil.example' }, { 'origin': 'null' }, { 'origin': 'https://evil.example', 'sec-fetch-site': 'cross-site' }] as Record<string, string>[]) {
      const answer = await admin('PATCH', '/api/settings', { siteName: 'Taken over' }, headers)
      expect(answer.status).toBe(403)
      expect(answer.body.data.code).toBe('foreign_origin')
    }
    expect((await admin('GET', '/api/settings')).body.siteName).not.toBe('Taken over')
    expect((await server.call('POST', '/api/auth/sign-in', { email: 'a@b.example', password: 'x' }, { origin: 'https://evil.example' })).status).toBe(403)
  })
  it('our own pages and programs without a browser go through', async () => {
    const admin = await server.as('admin')
    expect((await admin('PATCH', '/api/settings', {}, { origin: server.baseUrl })).status).toBe(200)
    expect((await admin('PATCH', '/api/settings', {})).status).toBe(200)
  })
})

describe('headers', () => {
  it('pages carry a policy under which each inline script has the nonce of this answer', async () => {
    const [one, two] = [await server.call('GET', '/sign-in'), await server.call('GET', '/sign-in')]
    const nonce = /script-src 'self' 'nonce-([^']+)'/.exec(one.headers.get('content-security-policy')!)![1]
    for (const [tag] of one.text.matchAll(/<script[^>]*>/g)) expect(tag).toContain(`nonce="${nonce}"`)
    expect(two.headers.get('content-security-policy')).not.toContain(nonce)
    expect(one.headers.get('content-security-policy')).toContain('frame-ancestors \'none\'')
  })
  it('answers of the API are not kept by anybody on the way', async () => {
    const { headers } = await (await server.as('viewer'))('GET', '/api/settings')
    expect(headers.get('cache-control')).toBe('no-store')
    expect(headers.get('x-content-type-options')).toBe('nosniff')
  })
})

describe('one-time links', () => {
  it('an invitation by mail sets the first password, once, and signs in', async () => {
    const admin = await server.as('admin')
    const invited = await admin('POST', '/api/people', { email: 'ina@site.example', name: 'Ina', role: 'technician' })
    expect(invited.status).toBe(201)
    const token = await linkFor('ina@site.example')
    expect((await server.call('POST', '/api/auth/link', { token })).body).toEqual({ email: 'ina@site.example', name: 'Ina', purpose: 'invitation' })
    const short = await server.call('POST', '/api/auth/set-password', { token, password: 'short' })
    expect(short.status).toBe(422)
    expect((await server.call('POST', '/api/auth/set-password', { token, password: 'kiln nine glaze' })).status).toBe(200)
    expect((await server.call('POST', '/api/auth/set-password', { token, password: 'another one here' })).status).toBe(404)
    expect((await server.signIn('ina@site.example', 'kiln nine glaze')).answer.body.person.role).toBe('technician')
  })
  it('a reset ends all sessions and all older links; the answer does not tell whether there is an account', async () => {
    const { call } = await server.signIn('ina@site.example', 'kiln nine glaze')
    const known = await server.call('POST', '/api/auth/reset', { email: 'ina@site.example' })
    const unknown = await server.call('POST', '/api/auth/reset', { email: 'nobody@site.example' })
    expect([known.status, known.text]).toEqual([unknown.status, unknown.text])
    expect(await server.db('mails').where('recipient', 'nobody@site.example')).toHaveLength(0)
    await server.call('POST', '/api/auth/reset', { email: 'ina@site.example' })
    await server.db('mails').where('kind', 'passwordReset').whereNot('status', 'sent').first()
    const mails = await waitFor(async () => { const rows = await server.db('mails').where({ kind: 'passwordReset', status: 'sent' }).orderBy('id'); return rows.length === 2 ? rows : null })
    const [older, newer] = mails.map((row: { text: string }) => /set-password#(\S+)/.exec(row.text)![1])
    expect((await server.call('POST', '/api/auth/set-password', { token: newer, password: 'a wholly new one' })).status).toBe(200)
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
    expect((await server.call('POST', '/api/auth/link', { token: older })).status).toBe(404)
    expect((await server.signIn('ina@site.example', 'kiln nine glaze')).answer.status).toBe(401)
  })
  it('a link that has run out is refused', async () => {
    await server.db('one_time_links').update({ used_at: null, expires_at: new Date(Date.now() - 1000) })
    const token = await linkFor('ina@site.example')
    expect((await server.call('POST', '/api/auth/link', { token })).status).toBe(404)
  })
  it('too many requests for links are refused, for any address', async () => {
    const answers = []
    for (let i = 0; i < 4; i++) answers.push((await server.call('POST', '/api/auth/reset', { email: 'spam@site.example' })).status)
    expect(answers).toEqual([200, 200, 200, 429])
  })
})

describe('own account', () => {
  it('the password changes only with the current one; other devices are signed out, this one is not', async () => {
    const here = await server.signIn('ina@site.example', 'a wholly new one')
    const there = await server.signIn('ina@site.example', 'a wholly new one')
    const wrong = await here.call('POST', '/api/account/password', { current: 'no', password: 'the third password' })
    expect(wrong.status).toBe(422)
    expect(wrong.body.data.issues[0].path).toBe('current')
    const right = await here.call('POST', '/api/account/password', { current: 'a wholly new one', password: 'the third password' })
    expect(right.status).toBe(200)
    expect((await there.call('GET', '/api/auth/me')).status).toBe(401)
    expect((await server.call('GET', '/api/auth/me', undefined, { cookie: right.headers.getSetCookie().at(-1)!.split(';')[0]! })).status).toBe(200)
  })
  it('name and mail preferences are kept; role and address cannot be changed this way', async () => {
    const { call } = await server.signIn('ina@site.example', 'the third password')
    const answer = await call('PATCH', '/api/account', { name: 'Ina Berg', notify: { assignment: false, handBack: true, overdue: true }, role: 'admin', email: 'x@site.example' })
    expect(answer.body).toMatchObject({ name: 'Ina Berg', role: 'technician', email: 'ina@site.example', notify: { assignment: false } })
  })
})

async function waitFor<T>(get: () => Promise<T | null>): Promise<T> {
  for (let tries = 0; tries < 100; tries++) {
    const got = await get()
    if (got) return got
    await new Promise(resolve => setTimeout(resolve, 100))
  }
  throw new Error('It did not come.')
}
