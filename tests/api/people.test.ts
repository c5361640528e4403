import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer, type Call } from '../setup/apiServer'

let server: ApiServer
let admin: Call
beforeAll(async () => {
  server = await startApiServer({ worker: false })
  admin = await server.as('admin')
})
afterAll(() => server?.stop())

const audit = async (action: string) => await server.db('audit').where({ action }).orderBy('id')

describe('people', () => {
  it('are listed without their hashes', async () => {
    const { body, text } = await admin('GET', '/api/people')
    expect(body).toHaveLength(4)
    expect(text).not.toContain('scrypt')
  })
  it('an address can have one account, whatever its letters', async () => {
    const answer = await admin('POST', '/api/people', { email: 'VIEWER@site.example', name: 'Twice', role: 'viewer' })
    expect([answer.status, answer.body.data.code]).toEqual([409, 'already_exists'])
  })
  it('disabling ends every session at once, and enabling brings none back', async () => {
    const { call } = await server.signIn('viewer@site.example', server.accounts.viewer.password)
    expect((await call('GET', '/api/auth/me')).status).toBe(200)
    expect((await admin('PATCH', `/api/people/${server.accounts.viewer.id}`, { disabled: true })).status).toBe(200)
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
    await admin('PATCH', `/api/people/${server.accounts.viewer.id}`, { disabled: false })
    expect((await call('GET', '/api/auth/me')).status).toBe(401)
    expect((await audit('person.change')).map(row => row.data.disabled)).toEqual([true, false])
  })
  it('a changed role counts from the next request on', async () => {
    const { call } = await server.signIn('engineer@site.example', server.accounts.engineer.password)
    await admin('PATCH', `/api/people/${server.accounts.engineer.id}`, { role: 'admin' })
    expect((await call('GET', '/api/people')).status).toBe(200)
    await admin('PATCH', `/api/people/${server.accounts.engineer.id}`, { role: 'engineer' })
    expect((await call('GET', '/api/people')).status).toBe(403)
    expect((await audit('person.change')).at(-1).data.role).toEqual({ from: 'admin', to: 'engineer' })
  })
  it('the last admin cannot be lost, not even by two at once', async () => {
    const id = server.accounts.admin.id
    expect((await admin('PATCH', `/api/people/${id}`, { disabled: true })).status).toBe(409)
    expect((await admin('PATCH', `/api/people/${id}`, { role: 'viewer' })).status).toBe(409)
    await admin('PATCH', `/api/people/${server.accounts.engineer.id}`, { role: 'admin' })
    const statuses = (await Promise.all([id, server.accounts.engineer.id].map(one => admin('PATCH', `/api/people/${one}`, { role: 'viewer' })))).map(a => a.status)
    expect(statuses.sort().join()).toMatch(/^200,(403|409)$/)
    await server.db('users').where({ id }).update({ role: 'admin' })
    await server.db('users').where({ id: server.accounts.engineer.id }).update({ role: 'engineer' })
  })
  it('who is not there is 404', async () => {
    expect((await admin('PATCH', '/api/people/999999', { disabled: true })).status).toBe(404)
    expect((await admin('PATCH', '/api/people/x', { disabled: true })).status).toBe(422)
  })
})

describe('access tokens', () => {
  it('are shown once, kept as a hash, and reach only what their scope says', async () => {
    const made = await admin('POST', '/api/tokens', { name: 'historian', scopes: ['read'] })
    expect(made.status).toBe(201)
    const bearer = { authorization: `Bearer ${made.body.token}` }
    expect((await server.call('GET', '/api/outages', undefined, bearer)).status).toBe(200)
    expect((await server.call('GET', '/api/settings', undefined, bearer)).status).toBe(403)
    expect((await server.call('POST', '/api/outages', {}, bearer)).status).toBe(403)
    expect((await admin('GET', '/api/tokens')).text).not.toContain(made.body.token)
    expect(JSON.stringify(await server.db('api_tokens'))).not.toContain(made.body.token)
    const importer = await server.withToken(['import'])
    expect((await importer('GET', '/api/outages')).status).toBe(403)
  })
  it('revoked is revoked at once', async () => {
    const { body } = await admin('POST', '/api/tokens', { name: 'short life', scopes: ['read'] })
    const bearer = { authorization: `Bearer ${body.token}` }
    expect((await server.call('GET', '/api/outages', undefined, bearer)).status).toBe(200)
    expect((await admin('DELETE', `/api/tokens/${body.id}`)).status).toBe(200)
    expect((await server.call('GET', '/api/outages', undefined, bearer)).status).toBe(401)
    expect((await admin('DELETE', `/api/tokens/${body.id}`)).status).toBe(404)
    expect((await audit('token.revoke')).at(-1)).toMatchObject({ entity_id: String(body.id) })
  })
  it('an unknown one is nobody, even beside a good cookie', async () => {
    expect((await admin('GET', '/api/people', undefined, { authorization: 'Bearer fettle_nothing' })).status).toBe(401)
  })
  it('needs a name and known scopes', async () => {
    const answer = await admin('POST', '/api/tokens', { name: ' ', scopes: ['write'] })
    expect(answer.status).toBe(422)
    expect(answer.body.data.issues.map((i: { path: string }) => i.path)).toEqual(['name', 'scopes.0'])
  })
})

describe('settings', () => {
  it('have defaults, change one by one, and leave an audit row with old and new', async () => {
    expect((await admin('GET', '/api/settings')).body).toMatchObject({ zone: 'Europe/London', digestWeekday: 1, digestHour: 6, changeNumberRequired: false })
    const answer = await admin('PATCH', '/api/settings', { zone: 'Europe/Dublin', digestHour: 5 })
    expect(answer.body).toMatchObject({ zone: 'Europe/Dublin', digestHour: 5, digestWeekday: 1 })
    expect((await audit('settings.change')).at(-1).data).toEqual({ zone: { from: 'Europe/London', to: 'Europe/Dublin' }, digestHour: { from: 6, to: 5 } })
  })
  it.each([[{ zone: 'Mars/Base' }, 'zone'], [{ digestHour: 24 }, 'digestHour'], [{ siteName: ' ' }, 'siteName'], [{ toleranceByType: { flow: -1, pressure: 1, level: 1, temperature: 1, analysis: 1, other: 1 } }, 'toleranceByType.flow']])('%j is refused at %s', async (change, path) => {
    const answer = await admin('PATCH', '/api/settings', change)
    expect(answer.status).toBe(422)
    expect(answer.body.data.issues[0].path).toBe(path)
  })
  it('a stored value that no longer fits falls back to its default', async () => {
    await server.db('settings').insert({ key: 'digestWeekday', value: '"Monday"' })
    expect((await admin('GET', '/api/settings')).body.digestWeekday).toBe(1)
  })
})

describe('outages', () => {
  const span = { from: '2026-11-16T06:00:00Z', to: '2026-11-17T06:00:00+01:00', reason: 'shut-down' }
  it('are declared, changed and removed by engineers, each with an audit row', async () => {
    const engineer = await server.as('engineer')
    const [{ id: areaId }] = await server.db('areas').insert({ name: 'Kilns' }).returning('id')
    const { status, body: { id } } = await engineer('POST', '/api/outages', { areaId, ...span })
    expect(status).toBe(201)
    expect((await engineer('GET', '/api/outages')).body).toMatchObject([{ id, area: 'Kilns', from: '2026-11-16T06:00:00.000Z', to: '2026-11-17T05:00:00.000Z' }])
    expect((await engineer('PATCH', `/api/outages/${id}`, { areaId: null, ...span })).status).toBe(200)
    expect((await engineer('DELETE', `/api/outages/${id}`)).status).toBe(200)
    expect((await engineer('DELETE', `/api/outages/${id}`)).status).toBe(404)
    expect((await server.db('audit').where('entity', 'outage').orderBy('id')).map(r => r.action)).toEqual(['outage.create', 'outage.change', 'outage.delete'])
  })
  it('must end after they begin, in an area that exists', async () => {
    const engineer = await server.as('engineer')
    expect((await engineer('POST', '/api/outages', { areaId: null, ...span, to: span.from })).body.data.issues).toEqual([{ path: 'to', message: 'must be after the begin' }])
    expect((await engineer('POST', '/api/outages', { areaId: 9999, ...span })).status).toBe(422)
  })
})

describe('the rest of the errors', () => {
  it('a body too large is 413, one that is no JSON 422, a route that is not there 404; all have the one form', async () => {
    const answers = [
      await admin('PATCH', '/api/settings', `{"siteName":"${'x'.repeat(1_100_000)}"}`), await admin('PATCH', '/api/settings', '{"siteName"'), await admin('GET', '/api/nowhere'),
    ]
    expect(answers.map(a => a.status)).toEqual([413, 422, 404])
    for (const { status, body, text } of answers) {
      expect(body).toMatchObject({ statusCode: status, statusMessage: expect.any(String), message: expect.any(String) })
      expect(text).not.toMatch(/stack|node_modules/)
    }
  })
  it('health tells without sign-in that no worker runs here', async () => {
    expect((await server.call('GET', '/api/health')).body).toMatchObject({ status: 'degraded', database: 'up', worker: 'down', version: expect.stringMatching(/^\d+\.\d+\.\d+$/) })
  })
})
