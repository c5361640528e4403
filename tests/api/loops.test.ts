import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer, type Call } from '../setup/apiServer'

/** A loop over the wire: an export in, then everything that its page does with it. */
let server: ApiServer
let engineer: Call
let viewer: Call
const HOURS = 12
const TAG = 'TIC-77'

/** A square-wave swing of 40 min about a steady set point, one sample a minute: invented, only its shape matters. */
function week(): string {
  const lines = ['time,TIC-77.PV,TIC-77.SP,TIC-77.OP,TIC-77.MODE']
  for (let k = 0; k < HOURS * 60; k++) {
    const swing = Math.sin(2 * Math.PI * k / 40)
    lines.push(`${new Date(Date.UTC(2026, 10, 23) + k * 60_000).toISOString()},${(500 + 12 * swing + 0.3 * Math.sin(k * 1.7)).toFixed(2)},500,${(40 - 5 * Math.sin(2 * Math.PI * (k - 8) / 40)).toFixed(2)},AUTO`)
  }
  return lines.join('\n')
}
async function settled(id: number) {
  for (;;) {
    const { body } = await engineer('GET', `/api/imports/${id}`)
    if (['done', 'failed', 'needsMapping'].includes(body.status)) return body
    await new Promise(r => setTimeout(r, 50))
  }
}
const page = async (call: Call = engineer) => (await call('GET', `/api/loops/${TAG}?week=2026-W48`)).body

beforeAll(async () => {
  server = await startApiServer()
  engineer = await server.as('engineer')
  viewer = await server.as('viewer')
  await engineer('POST', '/api/loops/import', `tag,type,pvLow,pvHigh,pvUnit,tolerance\n${TAG},temperature,0,1000,degC,5`, { 'content-type': 'text/csv' })
  const { body } = await engineer('POST', '/api/imports?name=week.csv', week(), { 'content-type': 'application/octet-stream' })
  expect(await settled(body.id)).toMatchObject({ status: 'done' })
}, 400_000)
afterAll(async () => { await server?.stop() })

describe('GET /api/loops/:tag', () => {
  it('answers the row, the configuration, the assessment with explanations, and the weeks there are', async () => {
    const loop = await page(viewer)
    expect(loop).toMatchObject({ tag: TAG, week: '2026-W48', type: 'temperature', configuration: { tag: TAG, pvHigh: 1000, tolerance: 5, version: expect.any(Number) } })
    expect(loop.ribbon).toHaveLength(168)
    expect(loop.weeks.map((w: { week: string }) => w.week)).toEqual(['2026-W48'])
    expect(loop.assessment.explanations.find((e: { measure: string }) => e.measure === 'iaePerHour')).toMatchObject({ source: expect.any(String), samples: HOURS * 60 })
  })
  it('finds the swing that was put in: period 40 min within 2 %, mean error 2/pi of the amplitude (closed form)', async () => {
    const loop = await page()
    expect(Math.abs(loop.oscillationPeriod / 2400 - 1)).toBeLessThan(0.02)
    expect(loop.iaePerHour).toBeCloseTo(12 * 2 / Math.PI, 0)
    expect(loop.serviceFactor).toBe(1)
    expect(loop.lostHours).toBe([...loop.ribbon].filter((c: string) => 'muhox'.includes(c)).length)
    expect(loop.hours.noData).toBe(168 - HOURS)
  })
  it('says 404 for a loop that is none and 422 for a week that is none', async () => {
    expect((await engineer('GET', '/api/loops/XYZ-1')).status).toBe(404)
    expect((await engineer('GET', `/api/loops/${TAG}?week=2026-W99`)).body).toMatchObject({ statusCode: 422, data: { code: 'invalid_input' } })
  })
})

describe('PATCH /api/loops/:tag', () => {
  it('changes the set-up, assesses the weeks again and keeps the earlier figures in the history', async () => {
    const before = await page()
    const answer = await engineer('PATCH', `/api/loops/${TAG}`, { version: before.configuration.version, tolerance: 50, gain: 2, form: 'series' })
    expect(answer.body).toMatchObject({ changed: expect.arrayContaining(['tolerance', 'gain', 'form']), weeks: 1 })
    await expect.poll(async () => (await page()).assessedWithVersion, { timeout: 30_000 }).toBe(before.configuration.version + 1)
    const after = await page()
    expect(after.hours.offTarget + after.hours.hunting).toBe(0)
    expect(after.earlier[0]).toMatchObject({ week: '2026-W48', lostHours: before.lostHours, cause: expect.stringContaining('tolerance') })
    expect(after.tuning[0]).toMatchObject({ kind: 'imported', tuning: expect.objectContaining({ gain: 2, form: 'series' }) })
  })
  it('refuses what somebody else changed meanwhile, a range that falls, and a viewer', async () => {
    expect((await engineer('PATCH', `/api/loops/${TAG}`, { version: 1, priority: 1 })).body).toMatchObject({ statusCode: 409, data: { code: 'changed_meanwhile' } })
    expect((await engineer('PATCH', `/api/loops/${TAG}`, { pvLow: 2000 })).status).toBe(422)
    expect((await viewer('PATCH', `/api/loops/${TAG}`, { priority: 1 })).status).toBe(403)
  })
  it('does not assess again for words that enter no figure', async () => {
    expect((await engineer('PATCH', `/api/loops/${TAG}`, { description: 'tile kiln' })).body).toEqual({ changed: ['description'], weeks: 0 })
  })
})

describe('a change that nobody recorded', () => {
  const list = (text: string) => engineer('POST', '/api/loops/import', text, { 'content-type': 'text/csv' })
  it('is flagged when a loop list brings another tuning or range, and stands in the tuning record', async () => {
    const { body } = await list(`tag,gain,pvHigh\n${TAG},3,1200`)
    expect(body.unrecorded).toEqual([{ tag: TAG, what: 'tuning' }, { tag: TAG, what: 'range' }])
    expect((await page()).tuning.slice(0, 2).map((t: { kind: string }) => t.kind)).toEqual(['unrecorded', 'unrecorded'])
  })
  it('is not, when the list brings nothing new or words only', async () => {
    expect((await list(`tag,gain,description\n${TAG},3,tile kiln zone`)).body.unrecorded).toEqual([])
  })
})

describe('set aside, shelved, concerns', () => {
  const later = new Date(Date.now() + 86_400_000).toISOString()
  it('a loop set aside leaves the ranking with its reason, and comes back', async () => {
    expect((await engineer('POST', `/api/loops/${TAG}/set-aside`, { week: '2026-W48', reason: 'trial of a burner', untilAt: later })).status).toBe(204)
    expect((await page()).setAsides[0]).toMatchObject({ reason: 'trial of a burner', endedAt: null, by: 'Engineer Test' })
    const only = await engineer('GET', '/api/loops?week=2026-W48&setAside=only')
    expect(only.body.rows.map((r: { tag: string }) => r.tag)).toEqual([TAG])
    expect((await engineer('GET', '/api/verdicts')).body.reduce((n: number, v: { setAside: number }) => n + v.setAside, 0)).toBe(1)
    await engineer('DELETE', `/api/loops/${TAG}/set-aside`)
    expect((await engineer('GET', '/api/loops?week=2026-W48&setAside=only')).body.total).toBe(0)
  })
  it('needs a reason and an end that lies ahead', async () => {
    expect((await engineer('POST', `/api/loops/${TAG}/set-aside`, { week: '2026-W48', reason: '', untilAt: later })).status).toBe(422)
    expect((await engineer('POST', `/api/loops/${TAG}/shelving`, { reason: 'out of use', untilAt: '2020-01-01T00:00:00Z' })).body.data.issues[0].path).toBe('untilAt')
  })
  it('a viewer may raise a concern, and nothing else', async () => {
    expect((await viewer('POST', `/api/loops/${TAG}/concerns`, { text: 'hunts whenever the door opens' })).status).toBe(204)
    expect((await page(viewer)).concerns[0]).toMatchObject({ text: 'hunts whenever the door opens', by: 'Viewer Test' })
    expect((await viewer('POST', `/api/loops/${TAG}/shelving`, { reason: 'out of use', untilAt: later })).status).toBe(403)
  })
})

describe('GET /api/groups', () => {
  it('answers a list by the contract, empty where nothing hunts together', async () => {
    expect((await viewer('GET', '/api/groups?week=2026-W48')).body).toEqual([])
  })
})
