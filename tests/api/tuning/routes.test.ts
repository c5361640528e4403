/** The routes of the tuning desk, over HTTP: the thread of the web server fits, roles hold, bad input is named. */
import { afterAll, beforeAll, expect, it } from 'vitest'
import type { ModelAnswer } from '../../../shared/types/tuning'
import { startApiServer, type ApiServer } from '../../setup/apiServer'
import { TRUTH, tuningPlant, TUNING_WEEK } from '../../setup/tuningPlant'

let server: ApiServer
beforeAll(async () => {
  server = await startApiServer({ worker: false })
  await tuningPlant(server.db)
})
afterAll(() => server?.stop())

const body = { fromWeek: TUNING_WEEK, toWeek: TUNING_WEEK }

it('fits in a thread of the web server, which answers others meanwhile', async () => {
  const call = await server.as('engineer')
  let done = false
  const fit = call<ModelAnswer>('POST', '/api/loops/TIC-5501/models', body).finally(() => { done = true })
  const health = await server.call('GET', '/api/health')
  expect(health.status).toBe(200)
  expect(done).toBe(false)
  const { status, body: answer } = await fit
  expect(status).toBe(200)
  const found = answer.joint!.fits.find(f => f.kind === 'fopdt')!
  expect(Math.abs(found.model!.processGain / TRUTH['TIC-5501'].processGain - 1)).toBeLessThan(0.1)
})
it('lets engineers fit and make sheets, and everybody read them', async () => {
  expect((await (await server.as('technician'))('POST', '/api/loops/TIC-5501/models', body)).status).toBe(403)
  expect((await (await server.as('viewer'))('POST', '/api/loops/TIC-5501/change-sheets', {})).status).toBe(403)
  expect((await server.call('GET', '/api/loops/TIC-5501/change-sheets')).status).toBe(401)
  expect(await (await server.as('viewer'))('GET', '/api/loops/TIC-5501/change-sheets')).toMatchObject({ status: 200, body: [] })
})
it('names what is wrong with the input', async () => {
  const call = await server.as('engineer')
  expect(await call('POST', '/api/loops/TIC-5501/models', { fromWeek: '2026-W00', toWeek: TUNING_WEEK })).toMatchObject({ status: 422, body: { data: { code: 'invalid_input', issues: [{ path: 'fromWeek' }] } } })
  expect((await call('POST', '/api/loops/NO-SUCH/models', body)).status).toBe(404)
  expect((await call('GET', '/api/change-sheets/99')).status).toBe(404)
  const sheet = await call('POST', '/api/loops/TIC-5501/change-sheets', { version: 1 })
  expect(sheet.status).toBe(422)
  expect(sheet.body.data.issues.map((i: { path: string }) => i.path)).toEqual(expect.arrayContaining(['proposed', 'reasons', 'stopCriteria', 'wayBack']))
})
