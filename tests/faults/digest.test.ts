import { spawn } from 'node:child_process'
import { join } from 'node:path'
import { createTransport } from 'nodemailer'
import { SMTPServer } from 'smtp-server'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { insertMail } from '../../db/repositories/mails'
import { sendDigest } from '../../server/services/digest/sendDigest'
import { sendDueDigest } from '../../server/services/digest/sendDueDigest'
import { changeSubscription, unsubscribe } from '../../server/services/digest/subscriptions'
import { sendDueMails } from '../../server/services/mail/sendDueMails'
import { freePort } from '../../scripts/lib/freePort.mjs'
import { makeAccounts, type Accounts } from '../setup/accounts'
import { scratchDatabase, type ScratchDatabase } from '../setup/scratchDatabase'
import { addLoop, addWeek } from '../setup/ticketPlant'

const publicUrl = 'https://fettle.example'
let scratch: ScratchDatabase
let accounts: Accounts
let loopId: number

beforeAll(async () => {
  scratch = await scratchDatabase()
  accounts = await makeAccounts(scratch.db)
  loopId = await addLoop(scratch.db, 'FIC-2107')
  await addLoop(scratch.db, 'TIC-1204', 'Kilns')
  await scratch.db('users').insert(Array.from({ length: 40 }, (_, k) => ({ email: `reader${k}@site.example`, name: `Reader ${k}`, role: 'viewer' })))
})
afterAll(() => scratch.drop())
beforeEach(async () => {
  for (const table of ['mails', 'digests', 'digest_subscriptions', 'loop_weeks', 'assessments_due']) await scratch.db(table).delete()
  await addWeek(scratch.db, loopId, '2026-W48', { lost: 60 })
})

async function subscribe(count: number): Promise<void> {
  const people = await scratch.db('users').orderBy('id').limit(count)
  for (const p of people) await changeSubscription(scratch.db, { userId: p.id, name: p.name }, { active: true, areaIds: [] })
}
const mails = () => scratch.db('mails').where({ kind: 'digest' }).orderBy('id')
const monday = (time: string) => new Date(`2026-11-30T${time}Z`)

/** A real mail server on loopback. `answer` may refuse a recipient with a code. */
async function mailServer(answer: (recipient: string) => number | null = () => null) {
  const got: { to: string, raw: string }[] = []
  const server = new SMTPServer({
    disabledCommands: ['STARTTLS', 'AUTH'], logger: false,
    onRcptTo({ address }, _, done) {
      const code = answer(address)
      done(code === null ? null : Object.assign(new Error('refused by the test'), { responseCode: code }))
    },
    onData(stream, session, done) {
      let raw = ''
      stream.on('data', chunk => raw += chunk)
      stream.on('end', () => { got.push({ to: session.envelope.rcptTo[0]!.address, raw }); done() })
    },
  })
  const port = await freePort()
  await new Promise<void>(resolve => server.listen(port, '127.0.0.1', resolve))
  server.on('error', () => {})
  return { got, port, transport: () => createTransport({ host: '127.0.0.1', port, ignoreTLS: true }), close: () => new Promise<void>(resolve => server.close(() => resolve())) }
}
const from = 'Fettle <fettle@tarn-hollow.example>'

describe('when the digest goes out', () => {
  it('on Monday at the set hour of the site, not before, and once', async () => {
    await subscribe(3)
    expect(await sendDueDigest(scratch.db, { publicUrl, now: monday('05:59:00') })).toBeNull()
    expect(await sendDueDigest(scratch.db, { publicUrl, now: monday('06:00:00') })).toBe('2026-W48')
    expect(await sendDueDigest(scratch.db, { publicUrl, now: monday('06:01:00') })).toBeNull()
    expect(await mails()).toHaveLength(3)
  })
  it('late rather than never: the system was down until Thursday', async () => {
    await subscribe(2)
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-12-03T15:00:00Z') })).toBe('2026-W48')
    expect(await mails()).toHaveLength(2)
  })
  it('not while the week is still being assessed, but not for ever', async () => {
    await subscribe(1)
    await scratch.db('assessments_due').insert({ loop_id: loopId, week: '2026-W48', cause: 'test' })
    expect(await sendDueDigest(scratch.db, { publicUrl, now: monday('08:00:00') })).toBeNull()
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-12-01T18:01:00Z') })).toBe('2026-W48')
  })
  it('in the week of a clock change at the same local hour (tz database: London leaves summer time on 25 Oct 2026)', async () => {
    await subscribe(1)
    await addWeek(scratch.db, loopId, '2026-W42', { lost: 9 })
    await addWeek(scratch.db, loopId, '2026-W43', { lost: 9 })
    // 06:00 BST is 05:00 UTC on 19 Oct; 06:00 GMT is 06:00 UTC on 26 Oct
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-10-19T04:59:00Z') })).not.toBe('2026-W42')
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-10-19T05:00:00Z') })).toBe('2026-W42')
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-10-26T05:59:00Z') })).toBeNull()
    expect(await sendDueDigest(scratch.db, { publicUrl, now: new Date('2026-10-26T06:00:00Z') })).toBe('2026-W43')
  })
  it('never for a week that is not over: its one mail would be spent on half of it', async () => {
    await subscribe(1)
    await expect(sendDigest(scratch.db, { week: '2026-W49', dueAt: monday('10:00:00'), publicUrl, now: monday('10:00:00'), by: { userId: null, name: 'x' } })).rejects.toMatchObject({ statusCode: 409, data: { code: 'week_not_over' } })
    expect(await mails()).toHaveLength(0)
  })
})

describe('one mail per person and week', () => {
  it('with four senders at once', async () => {
    await subscribe(20)
    await Promise.allSettled(Array.from({ length: 4 }, () => sendDueDigest(scratch.db, { publicUrl, now: monday('07:00:00') })))
    await sendDueDigest(scratch.db, { publicUrl, now: monday('07:01:00') })
    const all = await mails()
    expect(all).toHaveLength(20)
    expect(new Set(all.map(m => m.user_id)).size).toBe(20)
  })
  it('when the sender is killed in the middle and started again', async () => {
    await subscribe(40)
    const script = `
      import { openDatabase } from './db/knex.ts'
      import { sendDueDigest } from './server/services/digest/sendDueDigest.ts'
      const db = openDatabase(process.env.DATABASE_URL)
      console.log('begun')
      await sendDueDigest(db, { publicUrl: 'https://fettle.example', now: new Date('2026-11-30T07:00:00Z') })
      console.log('done')
      await db.destroy()`
    for (const delay of [0, 15, 40]) {
      await new Promise<void>((resolve) => {
        const child = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '-e', script], { cwd: join(import.meta.dirname, '../..'), env: { ...process.env, DATABASE_URL: scratch.url }, stdio: ['ignore', 'pipe', 'ignore'] })
        child.stdout!.on('data', (text: Buffer) => { if (text.toString().includes('begun')) setTimeout(() => child.kill('SIGKILL'), delay) })
        child.once('exit', () => resolve())
      })
    }
    await sendDueDigest(scratch.db, { publicUrl, now: monday('07:05:00') })
    const all = await mails()
    expect(all).toHaveLength(40)
    expect(new Set(all.map(m => m.key)).size).toBe(40)
  }, 60_000)
  it('a second press of the button reaches only who subscribed since', async () => {
    await subscribe(2)
    const send = () => sendDigest(scratch.db, { week: '2026-W48', dueAt: monday('09:00:00'), publicUrl, now: monday('09:00:00'), by: { userId: accounts.engineer.id, name: 'Engineer Test' } })
    expect(await send()).toEqual({ recipients: 2, queued: 2 })
    await subscribe(3)
    expect(await send()).toEqual({ recipients: 3, queued: 1 })
  })
  it('only of the areas followed', async () => {
    const kilns = await scratch.db('areas').where({ name: 'Kilns' }).first('id')
    await changeSubscription(scratch.db, { userId: accounts.viewer.id, name: 'V' }, { active: true, areaIds: [kilns.id] })
    await sendDueDigest(scratch.db, { publicUrl, now: monday('07:00:00') })
    const [mail] = await mails()
    expect(mail.text).not.toContain('FIC-2107')
    expect(mail.text).toContain('Kilns')
  })
})

describe('on the wire', () => {
  it('carries the headers of RFC 8058 on short lines, and text and HTML', async () => {
    await subscribe(1)
    await sendDueDigest(scratch.db, { publicUrl, now: monday('07:00:00') })
    const server = await mailServer()
    expect(await sendDueMails(scratch.db, server.transport(), { from })).toBe(1)
    await server.close()
    const head = server.got[0]!.raw.split('\r\n\r\n')[0]!
    expect(head).toMatch(/^List-Unsubscribe: <https:\/\/fettle\.example\/u\/[\w-]{12}>\r?$/m)
    expect(head).toMatch(/^List-Unsubscribe-Post: List-Unsubscribe=One-Click\r?$/m)
    expect(server.got[0]!.raw).toMatch(/text\/plain[\s\S]+text\/html/)
  })
  it('waits while the mail server is down and goes out later, once', async () => {
    await subscribe(2)
    await sendDueDigest(scratch.db, { publicUrl, now: monday('07:00:00') })
    const server = await mailServer()
    const { port } = server
    await server.close()
    const down = createTransport({ host: '127.0.0.1', port, ignoreTLS: true, connectionTimeout: 2000 })
    let now = Date.now()
    const clock = () => new Date(now)
    expect(await sendDueMails(scratch.db, down, { from, clock })).toBe(0)
    expect((await mails()).map(m => m.status)).toEqual(['waiting', 'waiting'])
    const up = await mailServer()
    now += 10 * 60_000
    // two senders at once
    await Promise.all([sendDueMails(scratch.db, up.transport(), { from, clock }), sendDueMails(scratch.db, up.transport(), { from, clock })])
    await up.close()
    expect(up.got.map(m => m.to).sort()).toHaveLength(2)
    expect(new Set(up.got.map(m => m.to)).size).toBe(2)
    expect((await mails()).map(m => m.status)).toEqual(['sent', 'sent'])
  })
  it('a refusal for good (550, RFC 5321) fails at once and is shown with its words; one for now (451) is tried again', async () => {
    await insertMail(scratch.db, { key: 'a', kind: 'digest', userId: null, recipient: 'gone@site.example', subject: 's', text: 't' })
    await insertMail(scratch.db, { key: 'b', kind: 'digest', userId: null, recipient: 'busy@site.example', subject: 's', text: 't' })
    const server = await mailServer(to => (to.startsWith('gone') ? 550 : 451))
    await sendDueMails(scratch.db, server.transport(), { from })
    await server.close()
    const [gone, busy] = await mails()
    expect(gone).toMatchObject({ status: 'failed', attempts: 1 })
    expect(gone.error).toContain('refused by the test')
    expect(busy).toMatchObject({ status: 'waiting', attempts: 1 })
  })
})

describe('stopping it', () => {
  it('ends exactly this subscription, as often as it is said', async () => {
    await subscribe(3)
    const [first] = await scratch.db('digest_subscriptions').orderBy('user_id')
    await unsubscribe(scratch.db, first.unsubscribe_token)
    await unsubscribe(scratch.db, first.unsubscribe_token)
    expect((await scratch.db('digest_subscriptions').orderBy('user_id')).map(s => s.active)).toEqual([false, true, true])
    await expect(unsubscribe(scratch.db, 'unknown-token')).rejects.toMatchObject({ statusCode: 404 })
  })
})
