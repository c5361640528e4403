import type { Role } from '../../shared/types/people'
import { makeAccounts, type Accounts } from './accounts'
import { scratchDatabase, type ScratchDatabase } from './scratchDatabase'
import { startApplication, type Application } from './startApplication'

export interface Answer<T = any> { status: number, headers: Headers, body: T, text: string }
export type Call = <T = any>(method: string, path: string, body?: unknown, headers?: Record<string, string>) => Promise<Answer<T>>

export interface ApiServer extends Application, Pick<ScratchDatabase, 'db'> {
  accounts: Accounts
  databaseUrl: string
  /** Calls as nobody. */
  call: Call
  /** Signs in as a role (once) and answers a caller with its cookie. */
  as: (role: Role) => Promise<Call>
  /** A caller with an access token. */
  withToken: (scopes: ('read' | 'import')[]) => Promise<Call>
  signIn: (email: string, password: string) => Promise<{ answer: Answer, cookie: string, call: Call }>
}

/** For tests/api: `beforeAll(async () => { server = await startApiServer() })`, `afterAll(() => server.stop())`. */
export async function startApiServer({ env = {}, worker = true }: { env?: Record<string, string>, worker?: boolean } = {}): Promise<ApiServer> {
  const database = await scratchDatabase()
  const accounts = await makeAccounts(database.db)
  const application = await startApplication({ databaseUrl: database.url, env, worker }).catch(async (error) => { await database.drop(); throw error })

  const caller = (own: Record<string, string>): Call => async (method, path, body, headers = {}) => {
    const raw = typeof body === 'string' || body instanceof Uint8Array || body instanceof ReadableStream
    const response = await fetch(application.baseUrl + path, {
      method, redirect: 'manual', headers: { ...(body !== undefined && !raw ? { 'content-type': 'application/json' } : {}), ...own, ...headers },
      body: body === undefined ? undefined : raw ? body as BodyInit : JSON.stringify(body), ...(body instanceof ReadableStream ? { duplex: 'half' } : {}),
    } as RequestInit)
    const text = await response.text()
    let parsed: any = text
    if (text && response.headers.get('content-type')?.includes('json')) parsed = JSON.parse(text)
    return { status: response.status, headers: response.headers, body: parsed, text }
  }
  const call = caller({})
  const signIn = async (email: string, password: string) => {
    const answer = await call('POST', '/api/auth/sign-in', { email, password })
    const cookie = answer.headers.getSetCookie().map(c => c.split(';')[0]!).at(-1) ?? ''
    return { answer, cookie, call: caller({ cookie }) }
  }
  const signedIn = new Map<Role, Promise<Call>>()
  const as = (role: Role) => {
    if (!signedIn.has(role)) {
      signedIn.set(role, signIn(accounts[role].email, accounts[role].password).then(({ answer, call }) => {
        if (answer.status !== 200) throw new Error(`Sign-in as ${role} answered ${answer.status}: ${answer.text}`)
        return call
      }))
    }
    return signedIn.get(role)!
  }
  const withToken = async (scopes: ('read' | 'import')[]) => {
    const { body } = await (await as('admin'))('POST', '/api/tokens', { name: `test ${scopes.join(' ')}`, scopes })
    return caller({ authorization: `Bearer ${body.token}` })
  }
  return {
    ...application, db: database.db, databaseUrl: database.url, accounts, call, as, withToken, signIn,
    stop: async () => {
      await application.stop()
      await database.drop()
    },
  }
}
