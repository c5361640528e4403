/** GET /api/loops, /api/plant, /api/weeks and saved views against the interface contract; sums are counted again here from the ribbons. */
import { parse } from 'csv-parse/sync'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { startApiServer, type ApiServer, type Call } from '../../setup/apiServer'
import { fleetWeeks, FLEET_LOOPS, FLEET_WEEK, FLEET_WEEK_BEFORE } from '../../setup/fleetWeeks'

let server: ApiServer
let viewer: Call
let ids: Record<string, number>
beforeAll(async () => {
  server = await startApiServer({ worker: false })
  ids = await fleetWeeks(server.db)
  await server.db('set_asides').insert({ loop_id: ids['PIC-2201'], verdict: 'manual', week: FLEET_WEEK, reason: 'agreed until the spring repair', until_at: '2099-01-01T00:00:00Z' })
  // ended and outlived ones must not count
  await server.db('set_asides').insert([{ loop_id: ids['FIC-2101'], verdict: 'manual', week: FLEET_WEEK, reason: 'ended', until_at: '2099-01-01', ended_at: new Date() }, { loop_id: ids['FIC-2102'], verdict: 'manual', week: FLEET_WEEK, reason: 'over', until_at: '2020-01-01' }])
  const [old, open] = await server.db('tickets').insert([{ title: 'Old', state: 'closed', week: FLEET_WEEK }, { title: 'Valve', state: 'assigned', week: FLEET_WEEK, due_on: '2020-01-02' }]).returning('id')
  await server.db('ticket_loops').insert([{ ticket_id: old.id, loop_id: ids['TIC-1102'] }, { ticket_id: open.id, loop_id: ids['FIC-2101'] }])
  await server.db('loops').insert({ tag: 'FIC-9999', description: 'without data' })
  viewer = await server.as('viewer')
})
afterAll(() => server?.stop())

const tags = (answer: { body: { rows: { tag: string }[] } }) => answer.body.rows.map(r => r.tag)
const lostLetters = /[muhox]/g

describe('GET /api/loops', () => {
  it('answers every key of the contract, and the newest week when none is asked for', async () => {
    const { status, body } = await viewer('GET', '/api/loops')
    expect(status).toBe(200)
    expect(body.week).toBe(FLEET_WEEK)
    expect(body.total).toBe(FLEET_LOOPS.length)
    expect(body.missing).toBe(1)
    const contract = ('tag description area unit type priority verdict confidence lostHours weightedLostHours hours ribbon serviceFactor saturationFraction iaePerHour iaePercentSpan offset standardDeviation '
      + 'timeInTolerance oscillationIndex oscillationPeriod oscillationAmplitude oscillationStrength varianceRatio varianceRatioLow varianceRatioHigh headroom valveTravelPerDay reversalsPerDay compressionFactor coverage group openTicket change').split(' ')
    for (const row of body.rows) for (const key of contract) expect(row, key).toHaveProperty(key)
  })

  it('ranks by weighted lost hours, those set aside last', async () => {
    const { body } = await viewer('GET', '/api/loops')
    const last = body.rows.at(-1)
    expect(last).toMatchObject({ tag: 'PIC-2201', setAside: { until: '2099-01-01T00:00:00.000Z' } })
    const weighted = body.rows.slice(0, -1).map((r: any) => r.weightedLostHours)
    expect(weighted).toEqual([...weighted].sort((a, b) => b - a))
    expect(body.rows.filter((r: any) => r.setAside)).toHaveLength(1)
  })

  it('its hours are the letters of the ribbon, weighted by priority, and change is against the week before', async () => {
    const { body } = await viewer('GET', '/api/loops')
    for (const row of body.rows) {
      const lost = (row.ribbon.match(lostLetters) ?? []).length
      expect(row.lostHours, row.tag).toBe(lost)
      expect(row.weightedLostHours).toBe(lost * (4 - row.priority))
      expect(Object.values<number>(row.hours).reduce((a, b) => a + b)).toBe(row.ribbon.length)
      const loop = FLEET_LOOPS.find(l => l.tag === row.tag)!
      const before = loop.before.reduce((n, [letter, from, to]) => n + (/[muhox]/.test(letter) ? to - from : 0), 0)
      expect(row.change, row.tag).toBe((lost - before) * (4 - row.priority))
    }
    expect(body.summary.lostHours).toBe(body.rows.reduce((n: number, r: any) => n + r.lostHours, 0))
    expect(body.summary.overTwenty).toBe(body.rows.filter((r: any) => r.lostHours > 20).length)
  })

  it('change cannot be told in the first week', async () => {
    const { body } = await viewer('GET', `/api/loops?week=${FLEET_WEEK_BEFORE}`)
    expect(body.rows.every((r: any) => r.change === null)).toBe(true)
    expect(body.summary.change).toBeNull()
  })

  it('group, open ticket and reason stand in the row; a closed ticket does not', async () => {
    const { body } = await viewer('GET', '/api/loops')
    const row = (tag: string) => body.rows.find((r: any) => r.tag === tag)
    expect(row('FIC-2101')).toMatchObject({ group: 'A', openTicketState: 'assigned' })
    expect(row('FIC-2101').openTicket).toBeTypeOf('number')
    expect(row('TIC-1102')).toMatchObject({ group: null, openTicket: null })
    expect(row('AIC-2401').reason).toMatch(/Less than half/)
    expect(body.groups).toEqual([{ letter: 'A', period: 2280, members: 3, likelySource: 'FIC-2101' }])
  })

  it.each(['tag', '-tag', 'description', 'area', 'type', 'priority', 'verdict', '-confidence', 'lostHours', '-change', 'group', '-openTicket', '-hours.hunting', 'coverage', '-oscillationPeriod', 'varianceRatio', '-varianceRatio', 'iaePerHour', '-offset', 'reversalsPerDay'])('sorts by %s, what cannot be told last', async (sort) => {
    const { body } = await viewer('GET', `/api/loops?setAside=include&sort=${sort}`)
    const key = sort.replace('-', '')
    const values = body.rows.map((r: any) => (key.startsWith('hours.') ? r.hours[key.slice(6)] : r[key]))
    const told = values.filter((v: unknown) => v !== null)
    expect(values.slice(told.length).every((v: unknown) => v === null)).toBe(true)
    const up = [...told].sort((a, b) => (a < b ? -1 : a > b ? 1 : 0))
    expect(told).toEqual(sort.startsWith('-') ? up.reverse() : up)
  })

  it('sorts by several keys', async () => {
    const rows = (await viewer('GET', '/api/loops?setAside=include&sort=area,-lostHours,tag')).body.rows
    const by = [...rows].sort((a: any, b: any) => a.area.localeCompare(b.area) || b.lostHours - a.lostHours || (a.tag < b.tag ? -1 : 1))
    expect(rows.map((r: any) => r.tag)).toEqual(by.map((r: any) => r.tag))
  })

  it('filters, alone and together; the sums follow', async () => {
    expect(tags(await viewer('GET', '/api/loops?area=Kilns'))).toHaveLength(6)
    expect(tags(await viewer('GET', '/api/loops?area=Kilns&area=Boiler%20house'))).toHaveLength(FLEET_LOOPS.length)
    expect(new Set(tags(await viewer('GET', '/api/loops?type=level,pressure')))).toEqual(new Set(['LIC-2301', 'PIC-2201']))
    expect(new Set(tags(await viewer('GET', '/api/loops?state=hunting&area=Kilns')))).toEqual(new Set(['TIC-1102']))
    expect(new Set(tags(await viewer('GET', '/api/loops?verdict=huntingExternal&group=A')))).toEqual(new Set(['FIC-2102', 'FIC-2103']))
    expect(tags(await viewer('GET', '/api/loops?priority=3'))).toEqual(['PIC-2201'])
    expect(new Set(tags(await viewer('GET', '/api/loops?lostOver=30')))).toEqual(new Set(['TIC-1102', 'PIC-2201']))
    expect(tags(await viewer('GET', '/api/loops?ticket=with'))).toEqual(['FIC-2101'])
    expect(tags(await viewer('GET', '/api/loops?setAside=only'))).toEqual(['PIC-2201'])
    expect(tags(await viewer('GET', '/api/loops?setAside=exclude'))).not.toContain('PIC-2201')
    const { body } = await viewer('GET', '/api/loops?area=Kilns&limit=2&offset=1')
    expect(body.rows).toHaveLength(2)
    expect(body.total).toBe(6)
    expect(body.summary.hours.offTarget).toBe(24)
  })

  it('search finds tag, words and area, and takes signs as they are', async () => {
    expect(tags(await viewer('GET', '/api/loops?search=fic-21'))).toHaveLength(3)
    expect(tags(await viewer('GET', '/api/loops?search=boiler'))).toHaveLength(10)
    for (const sign of ['%25', '_', '\\', `'%20or%201=1--`]) expect(tags(await viewer('GET', `/api/loops?search=${sign}`)), sign).toEqual([])
  })

  it('refuses what it does not know, naming it', async () => {
    for (const query of ['sort=-nothing', 'week=2026-47', 'week=2026-W60', 'week=2025-W53', 'state=broken', 'verdict=bad', 'limit=0', 'offset=-1', 'priority=4', `sort=tag;drop table loops`, 'sort=constructor']) {
      const { status, body } = await viewer('GET', `/api/loops?${query}`)
      expect(status, query).toBe(422)
      expect(body.data.issues[0].path.split('.')[0]).toBe(query.split('=')[0])
      expect(body.message, query).toMatch(/must be|is nothing|Invalid option|Too (small|big)|expected/i)
    }
    expect((await viewer('GET', '/api/loops?week=2020-W01')).body).toMatchObject({ week: '2020-W01', total: 0, rows: [] })
  })

  it('is for people who are signed in and for tokens that may read', async () => {
    for (const path of ['/api/loops', '/api/plant', '/api/weeks', '/api/saved-views']) expect((await server.call('GET', path)).status, path).toBe(401)
    const reader = await server.withToken(['read'])
    for (const path of ['/api/loops', '/api/plant', '/api/weeks']) expect((await reader('GET', path)).status, path).toBe(200)
    expect((await (await server.withToken(['import']))('GET', '/api/loops')).status).toBe(403)
    expect((await reader('GET', '/api/saved-views')).status).toBe(403)
  })
})

describe('CSV of what is shown', () => {
  // RFC 4180, read back by an independent reader
  it('has the same rows, order and full values', async () => {
    const json = (await viewer('GET', '/api/loops?area=Kilns&sort=-varianceRatio')).body.rows
    const answer = await viewer('GET', '/api/loops?area=Kilns&sort=-varianceRatio&format=csv')
    expect(answer.headers.get('content-type')).toContain('text/csv')
    expect(answer.headers.get('content-disposition')).toContain(`loops-${FLEET_WEEK}.csv`)
    expect(answer.text.split('\r\n')).toHaveLength(8)
    const rows = parse(answer.text, { columns: true, record_delimiter: '\r\n' }) as Record<string, string>[]
    expect(rows.map(r => r.tag)).toEqual(json.map((r: any) => r.tag))
    rows.forEach((r, i) => {
      expect(Number(r.varianceRatio)).toBe(json[i].varianceRatio)
      expect(r.ribbon).toBe(json[i].ribbon)
      expect(Number(r['hours.offTarget'])).toBe(json[i].hours.offTarget)
    })
  })
  it('writes the columns that are shown, the tag first, and quotes what would run in a spreadsheet', async () => {
    await server.db('loops').where({ tag: 'TIC-1101' }).update({ description: '=1+1, "zone"\n4' })
    const { text } = await viewer('GET', '/api/loops?area=Kilns&format=csv&columns=description,lostHours,nonsense,tag')
    const rows = parse(text, { columns: true }) as Record<string, string>[]
    expect(Object.keys(rows[0])).toEqual(['tag', 'description', 'lostHours'])
    expect(rows.find(r => r.tag === 'TIC-1101')!.description).toBe(`'=1+1, "zone"\n4`)
  })
})

describe('GET /api/plant', () => {
  it('areas add up to the plant, ribbons hold every loop once, the common upset is found', async () => {
    const { status, body } = await viewer('GET', `/api/plant?week=${FLEET_WEEK}`)
    expect(status).toBe(200)
    expect(body.areas.map((a: any) => a.area)).toEqual(['Kilns', 'Boiler house'])
    for (const key of ['loops', 'lostHours', 'change']) expect(body.areas.reduce((n: number, a: any) => n + a[key], 0), key).toBe(body[key])
    const all = body.areas.flatMap((a: any) => a.ribbons)
    expect(new Set(all.map((r: any) => r.tag)).size).toBe(FLEET_LOOPS.length)
    expect(all.reduce((n: number, r: any) => n + (r.ribbon.match(lostLetters) ?? []).length, 0)).toBe(body.lostHours)
    expect(body.areas[0].upsets).toEqual([{ from: 60, to: 64, loops: 6, lostHours: 24 }])
    expect(body.tickets).toEqual([expect.objectContaining({ title: 'Valve', overdue: true, dueOn: '2020-01-02', loops: ['FIC-2101'] })])
    expect(body.openTickets).toBe(1)
    expect(body.missing).toBe(1)
  })
  it('an empty week is empty, not an error', async () => {
    expect((await viewer('GET', '/api/plant?week=2020-W01')).body).toMatchObject({ loops: 0, lostHours: 0, change: null, areas: [] })
    expect((await viewer('GET', '/api/plant?week=soon')).status).toBe(422)
  })
})

describe('GET /api/weeks', () => {
  it('lists what was assessed, newest first, with the zone of the site', async () => {
    const { body } = await viewer('GET', '/api/weeks')
    expect(body.weeks.map((w: any) => w.week)).toEqual([FLEET_WEEK, FLEET_WEEK_BEFORE])
    expect(body.weeks[0].loops).toBe(FLEET_LOOPS.length)
    expect(body.zone).toMatch(/\//)
  })
})

describe('saved views', () => {
  it('are one\'s own until an engineer shares them', async () => {
    const engineer = await server.as('engineer')
    expect((await viewer('POST', '/api/saved-views', { name: 'Mine', query: 'area=Kilns' })).body.views).toMatchObject([{ name: 'Mine', mine: true, shared: false }])
    expect((await engineer('GET', '/api/saved-views')).body.views).toEqual([])
    expect((await viewer('POST', '/api/saved-views', { name: 'For all', query: '', shared: true })).status).toBe(403)
    await engineer('POST', '/api/saved-views', { name: 'Monday review', query: 'lostOver=20', shared: true })
    const seen = (await viewer('GET', '/api/saved-views')).body.views
    expect(seen).toMatchObject([{ name: 'Mine', mine: true }, { name: 'Monday review', mine: false, shared: true, owner: 'Engineer Test' }])
    const shared = seen[1].id
    expect((await viewer('DELETE', `/api/saved-views/${shared}`)).status).toBe(404)
    expect((await viewer('PATCH', `/api/saved-views/${shared}`, { name: 'Taken over' })).status).toBe(404)
    expect((await engineer('PATCH', `/api/saved-views/${shared}`, { shared: false })).status).toBe(200)
    expect((await viewer('GET', '/api/saved-views')).body.views).toHaveLength(1)
  })
  it('saving again under the same name replaces; two of one name cannot be', async () => {
    await viewer('POST', '/api/saved-views', { name: 'Twice', query: 'a=1' })
    const { body } = await viewer('POST', '/api/saved-views', { name: 'Twice', query: 'a=2' })
    expect(body.views.filter((v: any) => v.name === 'Twice')).toMatchObject([{ query: 'a=2' }])
    const mine = body.views.find((v: any) => v.name === 'Mine')
    expect((await viewer('PATCH', `/api/saved-views/${mine.id}`, { name: 'Twice' })).status).toBe(409)
    expect((await viewer('POST', '/api/saved-views', { name: '  ', query: '' })).status).toBe(422)
    expect((await viewer('DELETE', `/api/saved-views/${mine.id}`)).body.views.map((v: any) => v.name)).toEqual(['Twice'])
  })
})
