import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { gzipSync } from 'node:zlib'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer, type Call } from '../setup/apiServer'

let server: ApiServer
let engineer: Call
let machine: Call
beforeAll(async () => {
  server = await startApiServer({ env: { UPLOAD_LIMIT_BYTES: '3000000' } })
  engineer = await server.as('engineer')
  machine = await server.withToken(['import'])
}, 400_000)
afterAll(async () => { await server?.stop() })

const fixture = (name: string) => new Uint8Array(readFileSync(join(import.meta.dirname, '../../fixtures/exports', name)))
async function settled(call: Call, id: number) {
  for (;;) {
    const { body } = await call('GET', `/api/imports/${id}`)
    if (['done', 'failed', 'needsMapping'].includes(body.status)) return body
    await new Promise(r => setTimeout(r, 50))
  }
}
const send = (call: Call, query: string, body: unknown, headers: Record<string, string> = {}) => call('POST', `/api/imports${query}`, body, { 'content-type': 'application/octet-stream', ...headers })

describe('an upload', () => {
  it('is acknowledged, read, assessed, and shows in fleet and trend', async () => {
    const { status, body } = await send(machine, '?name=week.csv', fixture('good/wide-comma.csv'))
    expect([status, body.status]).toEqual([202, 'received'])
    const done = await settled(machine, body.id)
    expect(done).toMatchObject({ name: 'week.csv', status: 'done', progress: 1, rows: 60, samples: 480, loops: 2, rejected: 0, changed: 0, missing: { empty: 0, nan: 0, text: 0, badQuality: 0 }, weeks: ['2026-W48'], error: null })
    expect(done.startedAt).toMatch(/^\d{4}-\d\d-\d\dT.*Z$/)
    expect(Date.parse(done.finishedAt)).toBeGreaterThanOrEqual(Date.parse(done.startedAt))
    const fleet = await engineer('GET', '/api/loops?week=2026-W48')
    expect(fleet.body.rows.map((r: { tag: string, ribbon: string }) => [r.tag, r.ribbon.length]).sort()).toEqual([['FIC-211', 168], ['TIC-1204', 168]])
    const { body: trend } = await engineer('GET', '/api/loops/TIC-1204/trend?from=2026-11-23T06:00:00Z&to=2026-11-23T06:05:00Z&points=100')
    expect(trend.t.length).toBe(30)
    expect([trend.t[0], trend.pv[1], trend.sp[0], trend.op[4], trend.mode[0]]).toEqual(['2026-11-23T06:00:00.000Z', 850.1, 855, 31, 'AUTO'])
  })

  it('the same again changes nothing; an Idempotency-Key answers with the first', async () => {
    const again = await send(machine, '?name=week.csv', fixture('good/wide-comma.csv'))
    expect(await settled(machine, again.body.id)).toMatchObject({ status: 'done', changed: 0, weeks: [], samples: 480 })
    const key = { 'idempotency-key': 'nightly 2026-11-24' }
    const first = await send(machine, '', fixture('good/long-time-order.csv'), key)
    const second = await send(machine, '', fixture('good/long-time-order.csv'), key)
    expect([second.status, second.body.id]).toEqual([202, first.body.id])
    await settled(machine, first.body.id)
    // the key belongs to its sender
    const other = await send(engineer, '', fixture('good/long-time-order.csv'), key)
    expect(other.body.id).not.toBe(first.body.id)
    await settled(engineer, other.body.id)
  })

  it('says what was rejected, as CSV', async () => {
    const { body } = await send(machine, '', gzipSync(fixture('bad/mixed.csv')))
    expect(await settled(machine, body.id)).toMatchObject({ status: 'done', rows: 12, rejected: 7, missing: { empty: 2, nan: 1, text: 4, badQuality: 0 } })
    const csv = await machine('GET', `/api/imports/${body.id}/rejects`)
    expect(csv.headers.get('content-type')).toMatch(/^text\/csv/)
    expect(csv.text.split('\r\n').slice(0, 3)).toEqual(['line,column,cell,reason', '6,"TIC-1204.PV","12.3.4","not a number"', '7,"timestamp","yesterday","time stamp is not in the format of the file"'])
  })

  it('a person is asked about unknown loops and answers', async () => {
    const text = 'time,LIC-9.PV\n2026-11-23T06:00:00Z,1\n2026-11-23T06:00:10Z,2\n'
    const { body } = await send(engineer, '', text)
    expect(await settled(engineer, body.id)).toMatchObject({ status: 'needsMapping', mapping: { questions: ['unknownLoops'], loops: [{ tag: 'LIC-9', known: false, type: 'level' }] } })
    expect((await engineer('POST', `/api/imports/${body.id}/mapping`, { loops: [{ tag: 'LIC-9', action: 'perhaps' }] })).status).toBe(422)
    expect((await engineer('POST', `/api/imports/${body.id}/mapping`, { unknown: 'create' })).status).toBe(202)
    expect(await settled(engineer, body.id)).toMatchObject({ status: 'done', samples: 2, loops: 1 })
  })

  it('that cannot be read fails with a sentence', async () => {
    const { body } = await send(machine, '', fixture('bad/picture.png'))
    expect(await settled(machine, body.id)).toMatchObject({ status: 'failed', error: 'The file is not text: it holds binary data.', samples: 0 })
  })

  it('is refused when it is too large, announced or not, empty, or its options are wrong', async () => {
    const large = new Uint8Array(3_100_000).fill(49)
    expect((await send(machine, '', large).catch(() => ({ status: 413 }))).status).toBe(413)
    const chunked = new ReadableStream({ start(c) { for (let i = 0; i < 31; i++) c.enqueue(large.subarray(0, 100_000)); c.close() } })
    expect((await send(machine, '', chunked).catch(() => ({ status: 413 }))).status).toBe(413)
    expect((await send(machine, '', '')).status).toBe(422)
    const wrong = await send(machine, '?timezone=Mars/Base', 'x')
    expect([wrong.status, wrong.body.data.issues[0].path]).toEqual([422, 'timezone'])
  })

  it('events tell how far it is and end when it is done', async () => {
    const { body } = await send(machine, '', fixture('good/wide-tab.tsv'))
    const { text, headers } = await machine('GET', `/api/imports/${body.id}/events`)
    expect(headers.get('content-type')).toBe('text/event-stream')
    const events = text.split('\n\n').filter(e => e.startsWith('data: ')).map(e => JSON.parse(e.slice(6)))
    expect(events.at(-1)).toMatchObject({ id: body.id, status: 'done' })
  })

  it('who may', async () => {
    expect((await server.call('POST', '/api/imports', 'x')).status).toBe(401)
    expect((await (await server.as('technician'))('POST', '/api/imports', 'x')).status).toBe(403)
    expect((await (await server.withToken(['read']))('POST', '/api/imports', 'x')).status).toBe(403)
    expect((await (await server.withToken(['read']))('GET', '/api/imports')).status).toBe(200)
    expect((await (await server.as('viewer'))('GET', '/api/imports?limit=2')).body.rows.length).toBe(2)
    expect((await machine('GET', '/api/imports/999999')).status).toBe(404)
    expect((await machine('GET', '/api/imports/x')).status).toBe(404)
  })
})

describe('resumable uploads (tus 1.0.0)', () => {
  const tus = { 'tus-resumable': '1.0.0' }
  const part = { ...tus, 'content-type': 'application/offset+octet-stream' }
  const meta = (o: Record<string, string>) => Object.entries(o).map(([k, v]) => `${k} ${Buffer.from(v).toString('base64')}`).join(',')

  it('are continued where they broke off and become an import with their last byte', async () => {
    const file = fixture('good/long-tag-order.csv')
    const made = await engineer('POST', '/api/uploads', undefined, { ...tus, 'upload-length': String(file.length), 'upload-metadata': meta({ filename: 'long.csv', unknown: 'create' }) })
    expect(made.status).toBe(201)
    const place = made.headers.get('location')!
    expect((await engineer('PATCH', place, file.subarray(0, 1000), { ...part, 'upload-offset': '0' })).headers.get('upload-offset')).toBe('1000')
    expect((await engineer('HEAD', place, undefined, tus)).headers.get('upload-offset')).toBe('1000')
    expect((await engineer('PATCH', place, file.subarray(500), { ...part, 'upload-offset': '500' })).status).toBe(409)
    const last = await engineer('PATCH', place, file.subarray(1000), { ...part, 'upload-offset': '1000' })
    expect(last.status).toBe(204)
    const id = Number(last.headers.get('import-id'))
    expect(await settled(engineer, id)).toMatchObject({ name: 'long.csv', status: 'done', samples: 480, bytes: file.length })
    const head = await engineer('HEAD', place, undefined, tus)
    expect([head.headers.get('upload-offset'), head.headers.get('import-id')]).toEqual([String(file.length), String(id)])
  })

  it('follow the protocol: versions, lengths, owners, termination', async () => {
    const options = await engineer('OPTIONS', '/api/uploads')
    expect([options.status, options.headers.get('tus-version'), options.headers.get('tus-max-size')]).toEqual([204, '1.0.0', '3000000'])
    expect((await engineer('POST', '/api/uploads', undefined, { 'upload-length': '5' })).status).toBe(412)
    expect((await engineer('POST', '/api/uploads', undefined, { ...tus, 'upload-length': '3000001' })).status).toBe(413)
    expect((await engineer('POST', '/api/uploads', undefined, tus)).status).toBe(422)
    const made = await engineer('POST', '/api/uploads', undefined, { ...tus, 'upload-length': '5' })
    const place = made.headers.get('location')!
    expect((await (await server.as('admin'))('HEAD', place, undefined, tus)).status).toBe(404)
    expect((await engineer('PATCH', place, 'abcdef', { ...part, 'upload-offset': '0' })).status).toBe(413)
    expect((await engineer('PATCH', place, 'abc', { ...tus, 'upload-offset': '0' })).status).toBe(415)
    expect((await engineer('DELETE', place, undefined, tus)).status).toBe(204)
    expect((await engineer('HEAD', place, undefined, tus)).status).toBe(404)
  })
})

describe('a loop list', () => {
  const post = (call: Call, text: string) => call('POST', '/api/loops/import', text, { 'content-type': 'text/csv' })

  it('creates and changes loops, reports what it does not understand, and has figures made again', async () => {
    const first = await post(machine, [
      'tag,description,area,type,pvLow,pvHigh,pvUnit,normalModes,priority,form,action,gain,gainUnit,integralTime,timeUnit,upstream,colour',
      'TIC-1204,Kiln zone 4,Kilns,temperature,0,1300,degC,AUTO CAS,1,ideal,reverse,200,proportionalBand,5,min,FIC-211,red',
      'PIC-77,New loop,Utilities,pressure,0,10,bar,A;C,2,parallel,direct,1.5,gain,30,s,,',
      'XIC-1,,Kilns,sideways,0,10,,,2,,,,,,,,',
      'XIC-2,,Kilns,flow,10,5,,,9,,,abc,,,,,',
    ].join('\n'))
    expect(first.status).toBe(200)
    expect(first.body).toMatchObject({ rows: 4, created: 1, changed: 1, unchanged: 0, reassessed: 1, unknownColumns: ['colour'] })
    expect(first.body.errors.map((e: { line: number, column: string }) => [e.line, e.column])).toEqual([[4, 'type'], [5, 'priority'], [5, 'gain']])
    expect(first.body.changes.find((c: { tag: string }) => c.tag === 'TIC-1204').fields).toMatchObject({ area: { from: null, to: 'Kilns' }, priority: { from: 2, to: 1 }, gainUnit: { from: 'gain', to: 'proportionalBand' } })
    const again = await post(machine, 'tag;pvLow;pvHigh;tolerance\r\nPIC-77;0;10,5;0,25\r\nTIC-1204;0;1300;\r\n')
    expect(again.body).toMatchObject({ created: 0, changed: 1, unchanged: 1, errors: [] })
    const row = await server.db('loops').where({ tag: 'PIC-77' }).first()
    expect([row.pv_high, row.tolerance, row.normal_modes, row.range_guessed]).toEqual([10.5, 0.25, ['AUTO', 'CAS'], false])
  })

  it('needs a tag column, and the right to import', async () => {
    expect((await post(machine, 'name,area\nx,y')).body.data.issues[0].path).toBe('tag')
    expect((await post(await server.as('technician'), 'tag\nA')).status).toBe(403)
    expect((await post(await server.withToken(['read']), 'tag\nA')).status).toBe(403)
  })
})
