/** Tickets and digest over HTTP: what scripts and the pages call. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer, type Call } from '../../setup/apiServer'
import { addLoop, addSamples, addWeek, weekSpan } from '../../setup/ticketPlant'

let server: ApiServer
let engineer: Call
let technician: Call
let viewer: Call
const WEEK = '2026-W40'
const png = Buffer.from('89504e470d0a1a0a0000000d49484452', 'hex')

beforeAll(async () => {
  server = await startApiServer({ worker: false })
  ;[engineer, technician, viewer] = await Promise.all([server.as('engineer'), server.as('technician'), server.as('viewer')])
  for (const tag of ['FIC-1', 'FIC-2']) {
    const id = await addLoop(server.db, tag)
    await addWeek(server.db, id, WEEK, { lost: 60 })
    const span = weekSpan(WEEK)
    await addSamples(server.db, id, span.fromMs, span.toMs, { sd: 2, seed: id })
  }
})
afterAll(() => server?.stop())

const open = async (more: Record<string, unknown> = {}) => (await engineer('POST', '/api/tickets', { tags: ['FIC-1'], week: WEEK, assigneeId: server.accounts.technician.id, ...more })).body

describe('a ticket', () => {
  it('opens from one or many loops and keeps the evidence as it was', async () => {
    const ticket = await open({ tags: ['FIC-2', 'FIC-1', 'FIC-2'] })
    expect(ticket).toMatchObject({ state: 'assigned', title: 'FIC-2 hunts: sticking valve (and 1 more)', version: 1, evidence: [{ tag: 'FIC-2', lostHours: 60 }, { tag: 'FIC-1' }] })
    const id = (await server.db('loops').where({ tag: 'FIC-2' }).first('id')).id
    await addWeek(server.db, id, WEEK, { lost: 3, verdict: 'steady' })
    expect((await viewer('GET', `/api/tickets/${ticket.id}`)).body.evidence[0]).toMatchObject({ lostHours: 60, verdict: 'huntingValve' })
  })
  it('is refused with a sentence when the input is wrong', async () => {
    for (const body of [{ tags: [] }, { tags: ['NO-SUCH'] }, { tags: ['FIC-1'], week: '2026-W60' }, { tags: ['FIC-1'], assigneeId: server.accounts.viewer.id }, { tags: ['FIC-1'], assigneeId: 99_999 }, { tags: ['FIC-1'], groupId: 99_999 }]) {
      const { status, body: answer } = await engineer('POST', '/api/tickets', { week: WEEK, ...body })
      expect([status, answer.data.code, answer.data.issues.length > 0]).toEqual([422, 'invalid_input', true])
    }
  })
  it('goes its way only by legal moves and by role; each move leaves one history and one audit row', async () => {
    const { id } = await open()
    const patch = (as: Call, body: unknown) => as('PATCH', `/api/tickets/${id}`, body)
    expect((await patch(technician, { version: 1, state: 'toVerify' })).status).toBe(409)
    expect((await patch(viewer, { version: 1, state: 'inWork' })).status).toBe(403)
    expect((await patch(technician, { version: 1, priority: 1 })).status).toBe(403)
    expect((await patch(technician, { version: 1, state: 'inWork' })).body).toMatchObject({ state: 'inWork', version: 2 })
    expect((await patch(technician, { version: 2, state: 'toVerify' })).body).toMatchObject({ state: 'toVerify', version: 3 })
    expect((await patch(technician, { version: 3, state: 'inWork', reason: 'x' })).status).toBe(403)
    expect((await patch(engineer, { version: 3, state: 'inWork' })).body.data.code).toBe('needs_reason')
    expect((await patch(engineer, { version: 3, state: 'inWork', reason: 'measure again' })).status).toBe(200)
    expect((await patch(engineer, { version: 4, state: 'closed' })).status).toBe(422)
    expect((await patch(engineer, { version: 4, state: 'dropped', reason: 'loop was taken out' })).body.state).toBe('dropped')
    expect((await patch(engineer, { version: 5, state: 'open' })).body).toMatchObject({ state: 'open', assigneeId: null })
    const history = await server.db('ticket_events').where({ ticket_id: id, kind: 'moved' })
    const audit = await server.db('audit').where({ entity: 'ticket', entity_id: String(id) })
    expect(history).toHaveLength(5)
    expect(audit).toHaveLength(6)
    // the technician was told of the assignment and of the way back, the engineer of the handing back
    expect((await server.db('mails').where('subject', 'like', `Ticket ${id} %`).orderBy('id')).map((m: any) => [m.kind, m.recipient])).toEqual([['assignment', 'technician@site.example'], ['handBack', 'engineer@site.example'], ['handBack', 'technician@site.example']])
  })
  it('is locked against two people at once: 409 with the ticket as it is now', async () => {
    const { id } = await open()
    const answers = await Promise.all(['one', 'two', 'three'].map(title => engineer('PATCH', `/api/tickets/${id}`, { version: 1, title })))
    expect(answers.map(a => a.status).sort()).toEqual([200, 409, 409])
    const winner = answers.find(a => a.status === 200)!.body.title
    for (const { body } of answers.filter(a => a.status === 409)) expect(body.data).toMatchObject({ code: 'changed_meanwhile', theirs: { title: winner, version: 2 } })
  })
  it('is found by state, person, area, due date and words', async () => {
    const { id } = await open({ title: 'needle in the hay', dueOn: '2026-01-05' })
    const ids = async (query: string) => (await viewer('GET', `/api/tickets?${query}`)).body.rows.map((r: any) => r.id)
    expect(await ids('search=needle')).toEqual([id])
    expect(await ids(`search=T-${id}`)).toEqual([id])
    expect(await ids('due=overdue')).toContain(id)
    expect(await ids('area=Kilns')).toEqual([])
    expect(await ids('state=closed&search=needle')).toEqual([])
    expect((await technician('GET', '/api/tickets?assignee=me&search=needle')).body.rows[0]).toMatchObject({ id, overdue: true, verdict: 'huntingValve', lostHours: 60 })
    expect((await server.withToken(['read']).then(call => call('GET', '/api/tickets?search=needle'))).body.total).toBe(1)
  })
})

describe('entries and files', () => {
  it('sent again with the same key change nothing', async () => {
    const { id } = await open()
    const send = () => technician('POST', `/api/tickets/${id}/entries`, { idempotencyKey: 'one-and-the-same', at: '2026-10-06T09:00:00Z', entry: { kind: 'comment', text: 'from the field' } })
    const answers = await Promise.all([send(), send(), send()])
    expect(answers.map(a => a.status).sort()).toEqual([200, 200, 201])
    expect(await server.db('ticket_events').where({ ticket_id: id, kind: 'comment' })).toHaveLength(1)
    // a key belongs to its ticket: on another one it is another entry
    const other = await open()
    expect((await technician('POST', `/api/tickets/${other.id}/entries`, { idempotencyKey: 'one-and-the-same', entry: { kind: 'comment', text: 'x' } })).status).toBe(201)
    expect((await viewer('POST', `/api/tickets/${id}/comments`, { text: 'seen in the control room' })).status).toBe(201)
    expect((await viewer('POST', `/api/tickets/${id}/entries`, { entry: { kind: 'check', checkId: 'operator', values: { said: 'x' } } })).status).toBe(403)
  })
  it('takes a photo once, by its bytes and not by its name, and hands it out so that nothing can run', async () => {
    const { id } = await open()
    const send = (name: string, body: Uint8Array, key?: string) => technician('POST', `/api/tickets/${id}/files?name=${encodeURIComponent(name)}`, body, { 'content-type': 'application/octet-stream', ...(key ? { 'idempotency-key': key } : {}) })
    const [first, again] = [await send('Stellung "1" ü.png', png, 'photo-key-1'), await send('Stellung "1" ü.png', png, 'photo-key-1')]
    expect([first.status, again.status, again.body.id]).toEqual([201, 200, first.body.id])
    const got = await viewer('GET', `/api/tickets/${id}/files/${first.body.id}`)
    expect(got.headers.get('content-type')).toBe('image/png')
    expect(got.headers.get('x-content-type-options')).toBe('nosniff')
    expect(got.headers.get('content-security-policy')).toContain('sandbox')
    expect(got.headers.get('content-disposition')).toBe('inline; filename="Stellung _1_ _.png"; filename*=UTF-8\'\'Stellung%20%221%22%20%C3%BC.png')
    expect((await send('x.png', Buffer.from([0x4D, 0x5A, 0x90, 0x00, 0x03]))).status).toBe(415)
    expect((await send('empty.png', Buffer.alloc(0))).status).toBe(422)
    expect((await send('huge.png', Buffer.concat([png, Buffer.alloc(15 * 1024 * 1024)]))).status).toBe(413)
    // a page dressed as a photo stays text, and is handed over rather than shown
    const page = await send('photo.jpg', Buffer.from('<html><script>alert(1)</script></html>'))
    const text = await viewer('GET', `/api/tickets/${id}/files/${page.body.id}`)
    expect([text.headers.get('content-type'), text.headers.get('content-disposition')!.split(';')[0]]).toEqual(['text/plain; charset=utf-8', 'attachment'])
    // the number of a file does not open it under another ticket
    expect((await viewer('GET', `/api/tickets/${(await open()).id}/files/${first.body.id}`)).status).toBe(404)
    expect((await server.call('GET', `/api/tickets/${id}/files/${first.body.id}`)).status).toBe(401)
  })
})

describe('proof and closing', () => {
  it('answers what the data say, and closes against it only with a reason', async () => {
    const { id } = await open()
    await technician('PATCH', `/api/tickets/${id}`, { version: 1, state: 'inWork' })
    expect((await viewer('GET', `/api/tickets/${id}/proof`)).body).toMatchObject({ verdict: 'cannotTell', provisional: true })
    await technician('PATCH', `/api/tickets/${id}`, { version: 2, state: 'toVerify', workDoneAt: new Date(weekSpan(WEEK).toMs).toISOString() })
    const refused = await engineer('POST', `/api/tickets/${id}/close`, { outcome: 'valveRepaired' })
    expect([refused.status, refused.body.data.code]).toEqual([409, 'proof_missing'])
    expect((await technician('POST', `/api/tickets/${id}/close`, { outcome: 'valveRepaired' })).status).toBe(403)
    const closed = await engineer('POST', `/api/tickets/${id}/close`, { outcome: 'valveRepaired', reason: 'the line is shut down until spring' })
    expect(closed.body).toMatchObject({ state: 'closed', outcome: 'valveRepaired', closeReason: 'the line is shut down until spring', proof: { verdict: 'cannotTell' } })
    expect((await viewer('GET', '/api/benefit')).body.rows).toEqual([])
    expect((await technician('POST', `/api/tickets/${id}/entries`, { entry: { kind: 'check', checkId: 'operator', values: { said: 'late' } } })).body.data.code).toBe('ticket_closed')
  })
})

describe('unsubscribing', () => {
  it('is done by the POST of a mail program without cookie (RFC 8058), never by a GET', async () => {
    await viewer('PUT', '/api/digests/subscription', { active: true, areaIds: [] })
    const active = async () => (await server.db('digest_subscriptions').where({ user_id: server.accounts.viewer.id }).first()).active
    const { unsubscribe_token: token } = await server.db('digest_subscriptions').first()
    const get = await server.call('GET', `/u/${token}`)
    expect(get.status).toBe(200)
    expect(get.headers.get('content-type')).toContain('text/html')
    expect((await server.call('HEAD', `/u/${token}`)).status).toBe(200)
    expect(await active()).toBe(true)
    const form = { 'content-type': 'application/x-www-form-urlencoded' }
    expect((await server.call('POST', `/u/${token}`, 'List-Unsubscribe=One-Click', form)).status).toBe(200)
    expect(await active()).toBe(false)
    expect((await server.call('POST', `/u/${token}`, 'List-Unsubscribe=One-Click', form)).status).toBe(200)
    expect((await server.call('POST', '/u/nobody-has-this', 'List-Unsubscribe=One-Click', form)).status).toBe(404)
  })
  it('the digest is previewed by everybody and sent by engineers', async () => {
    expect((await viewer('GET', `/api/digests/preview?week=${WEEK}`)).body.text).toContain('FIC-1')
    expect((await viewer('POST', '/api/digests', { week: WEEK })).status).toBe(403)
    await viewer('PUT', '/api/digests/subscription', { active: true, areaIds: [] })
    expect((await engineer('POST', '/api/digests', { week: WEEK })).body).toEqual({ recipients: 1, queued: 1 })
    expect((await viewer('GET', '/api/digests')).body).toMatchObject({ mails: [{ week: WEEK, recipient: 'viewer@site.example', status: 'waiting' }], subscribers: [{ name: 'Viewer Test', areas: [] }] })
    expect((await viewer('PUT', '/api/digests/subscription', { active: true, areaIds: [99_999] })).status).toBe(422)
  })
})
