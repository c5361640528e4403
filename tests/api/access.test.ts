import { readdirSync } from 'node:fs'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { atLeast, ROLES } from '../../shared/types/people'
import { startApiServer, type ApiServer, type Call } from '../setup/apiServer'
import { accessMatrix } from './accessMatrix'

const root = join(import.meta.dirname, '../..')

/** `GET /api/loops/[tag]` for each route file, as Nitro reads their names. */
function routesOf(folder: string, prefix: string): string[] {
  return (readdirSync(join(root, folder), { recursive: true }) as string[]).filter(name => name.endsWith('.ts') && !name.startsWith('[...]')).map((name) => {
    const [, path, method] = /^(.*?)\.(get|post|put|patch|delete|head|options)\.ts$/.exec(name) ?? []
    if (!method) throw new Error(`${folder}/${name} names no method, so that it answers to all of them.`)
    return `${method.toUpperCase()} ${prefix}/${path!.replace(/(^|\/)index$/, '')}`.replace(/\/$/, '')
  })
}
const routes = [...routesOf('server/api', '/api'), ...routesOf('server/routes', '')].sort()

let server: ApiServer
const callers: Record<string, Call> = {}
beforeAll(async () => {
  server = await startApiServer({ worker: false })
  for (const role of ROLES) callers[role] = await server.as(role)
  callers.nobody = server.call
  callers.read = await server.withToken(['read'])
  callers.import = await server.withToken(['import'])
})
afterAll(() => server?.stop())

describe('access', () => {
  it('each route has a row, and each row a route', () => {
    expect(accessMatrix.map(row => row.route).sort()).toEqual(routes)
  })
  for (const { route, who, scopes } of accessMatrix) {
    it(`${route}: ${who}${scopes.length ? `, token with ${scopes.join(' or ')}` : ''}`, async () => {
      const [method, pattern] = route.split(' ') as [string, string]
      const path = pattern.replace(/\[tag\]/g, 'NONE-1').replace(/\[\w+\]/g, '999999')
      const status = async (caller: string) => (await callers[caller]!(method, path, method === 'GET' || method === 'HEAD' ? undefined : {}, { 'tus-resumable': '1.0.0' })).status
      if (who === 'anybody') {
        // 401 is also the answer to a wrong password
        expect(await status('nobody')).toBeOneOf([200, 204, 401, 404, 422])
        return
      }
      expect(await status('nobody'), 'nobody').toBe(401)
      for (const role of ROLES) {
        const got = await status(role)
        if (atLeast(role, who)) expect([role, got >= 500, got === 401 || got === 403]).toEqual([role, false, false])
        else expect([role, got]).toEqual([role, 403])
      }
      for (const token of ['read', 'import'] as const) {
        const got = await status(token)
        if (scopes.includes(token)) expect([token, got >= 500, got === 401 || got === 403]).toEqual([token, false, false])
        else expect([token, got]).toEqual([token, 403])
      }
    })
  }
})
