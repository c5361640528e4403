import { statSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { insertLoops } from '../../db/repositories/loops'
import { startApiServer, type ApiServer } from '../setup/apiServer'
import { accessMatrix } from './accessMatrix'

let server: ApiServer
beforeAll(async () => {
  server = await startApiServer({ worker: false })
  await insertLoops(server.db, [{ tag: 'FIC-1' }])
})
afterAll(() => server?.stop())

it.each([
  ['half of an escape', '%E0%A4%A'], ['the character NUL', '%00'], ['a path upwards', '..%2F..%2Fsecrets.json'], ['the largest whole number', '9007199254740991'], ['more than that', '99999999999999999999'], ['no number', 'NaN'],
])('%s in the path of any route is never an error of the server, and opens no file', async (_, piece) => {
  const admin = await server.as('admin')
  for (const { route } of accessMatrix.filter(row => row.route.includes('['))) {
    const [method, pattern] = route.split(' ') as [string, string]
    const { status, text } = await admin(method, pattern.replace(/\[\w+\]/g, piece), ['GET', 'HEAD'].includes(method) ? undefined : {}, { 'tus-resumable': '1.0.0' })
    expect([route, status >= 500, text.includes('sessionPassword')]).toEqual([route, false, false])
  }
})

it.each([['NUL', 'a\u0000b'], ['half of a pair', 'a\uD800b']])('text with %s, which no database takes, is 422 in body and query', async (_, text) => {
  const admin = await server.as('admin')
  for (const [method, path, body] of [
    ['POST', '/api/people', { email: 'x@site.example', name: text, role: 'viewer' }], ['POST', '/api/tokens', { name: text, scopes: ['read'] }], ['PATCH', '/api/settings', { siteName: text }],
    ['POST', '/api/tickets', { tags: ['FIC-1'], title: text }], ['POST', '/api/loops/FIC-1/concerns', { text }], ['POST', '/api/saved-views', { name: text, query: '', shared: false }],
    ['POST', '/api/auth/sign-in', { email: text, password: text }],
  ] as const) expect([path, (await admin(method, path, JSON.stringify(body), { 'content-type': 'application/json' })).status]).toEqual([path, 422])
  if (text.includes('\0')) for (const path of ['/api/loops?search=%00', '/api/tickets?search=%00', '/api/audit?entity=%00']) expect([path, (await admin('GET', path)).status]).toEqual([path, 422])
})

it('a loop list or an upload name with NUL is refused or cleaned, and never an error of the server', async () => {
  const admin = await server.as('admin')
  expect((await admin('POST', '/api/loops/import', 'tag,description\nFIC-2,a\0b\n')).status).toBeLessThan(500)
  expect((await admin('POST', '/api/uploads', '', { 'tus-resumable': '1.0.0', 'upload-length': '5', 'upload-metadata': `name ${Buffer.from('a\0b').toString('base64')}` })).status).toBe(201)
})

it('a trend draws at most 100 days, because every sample of them is decoded', async () => {
  const viewer = await server.as('viewer')
  expect((await viewer('GET', '/api/loops/FIC-1/trend?from=2026-01-01T00:00:00Z&to=2026-04-01T00:00:00Z')).status).toBe(200)
  const { status, body } = await viewer('GET', '/api/loops/FIC-1/trend?from=1970-01-01T00:00:00Z&to=2026-04-01T00:00:00Z')
  expect([status, body.data.issues[0].path]).toEqual([422, 'from'])
})

it('when the work of a ticket was done is no matter of a viewer or of a technician who does not hold it', async () => {
  const engineer = await server.as('engineer')
  const { body: { id } } = await engineer('POST', '/api/tickets', { tags: ['FIC-1'], week: '2026-W48', title: 'Look at it' })
  const workDoneAt = '2026-11-30T10:00:00Z'
  for (const role of ['viewer', 'technician'] as const) expect([role, (await (await server.as(role))('PATCH', `/api/tickets/${id}`, { version: 1, workDoneAt })).status]).toEqual([role, 403])
  expect((await engineer('PATCH', `/api/tickets/${id}`, { version: 1, workDoneAt })).status).toBe(200)
})

it('what people send lies where other users of the machine cannot read it', async () => {
  const engineer = await server.as('engineer')
  const { body } = await engineer('POST', '/api/tickets', { tags: ['FIC-1'], week: '2026-W48', title: 'A file' })
  expect((await engineer('POST', `/api/tickets/${body.id}/files?name=note.txt`, 'plain text', { 'content-type': 'application/octet-stream' })).status).toBe(201)
  expect((await engineer('POST', '/api/imports?name=x.csv', 'time,FIC-1.PV\n2026-11-23T06:00:00Z,1\n')).status).toBe(202)
  for (const folder of ['uploads', 'attachments']) expect([folder, statSync(join(server.dataDir, folder)).mode & 0o077]).toEqual([folder, 0])
})

it('someone whose session was ended hears no more of an import', async () => {
  const engineer = await server.as('engineer')
  const { body: { id } } = await engineer('POST', '/api/imports?name=y.csv', 'time,FIC-1.PV\n2026-11-23T07:00:00Z,1\n')
  const { cookie } = await server.signIn(server.accounts.viewer.email, server.accounts.viewer.password)
  const stream = await fetch(`${server.baseUrl}/api/imports/${id}/events`, { headers: { cookie } })
  const reader = stream.body!.getReader()
  expect(new TextDecoder().decode((await reader.read()).value)).toContain('"status":"received"')
  await server.db('sessions').where('user_id', server.accounts.viewer.id).delete()
  // without that the stream would go on for as long as the import waits
  while (!(await reader.read()).done);
})
