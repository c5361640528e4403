import type { AddressInfo } from 'node:net'
import { createTransport, type Transporter } from 'nodemailer'
import { SMTPServer } from 'smtp-server'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { listCaughtMails, listMails, retryFailedMail, takeDueMail } from '../../db/repositories/mails'
import { catchMails } from '../../server/services/mail/catchMails'
import { queueMail } from '../../server/services/mail/queueMail'
import { readCaughtMail } from '../../server/services/mail/readCaughtMail'
import { sendDueMails } from '../../server/services/mail/sendDueMails'
import { scratchDatabase, type ScratchDatabase } from '../setup/scratchDatabase'

const from = 'Fettle <fettle@site.example>'
const mail = (key: string, recipient = 'edda@site.example') => ({ key, kind: 'test', userId: null, recipient, subject: `About ${key}`, text: 'Words.', html: '<p>Words.</p>', headers: { 'List-Unsubscribe': '<https://site.example/u/x>' } })

let scratch: ScratchDatabase
let server: SMTPServer
let transport: Transporter
let got: string[]
/** what the server answers to a recipient, by its local part */
const answers: Record<string, number> = { full: 452, nobody: 550 }

beforeAll(async () => {
  scratch = await scratchDatabase()
  server = new SMTPServer({
    authOptional: true, disabledCommands: ['STARTTLS', 'AUTH'],
    onRcptTo({ address }, _session, done) {
      const responseCode = answers[address.split('@')[0]!]
      done(responseCode ? Object.assign(new Error('refused'), { responseCode }) : null)
    },
    onData(stream, _session, done) {
      let text = ''
      stream.on('data', (chunk: Buffer) => { text += chunk })
      stream.on('end', () => { got.push(text); done() })
    },
  })
  await new Promise<void>(resolve => server.listen(0, '127.0.0.1', resolve))
  transport = createTransport({ host: '127.0.0.1', port: (server.server.address() as AddressInfo).port, secure: false })
})
beforeEach(async () => {
  got = []
  await scratch.db('mails').delete()
})
afterAll(async () => {
  transport?.close()
  await new Promise<void>(resolve => server.close(() => resolve()))
  await scratch.drop()
})

describe('mail queue', () => {
  it('sends what is due, once, with the headers given', async () => {
    await queueMail(scratch.db, mail('a'))
    expect(await sendDueMails(scratch.db, transport, { from })).toBe(1)
    expect(await sendDueMails(scratch.db, transport, { from })).toBe(0)
    expect(got).toHaveLength(1)
    expect(got[0]).toMatch(/^List-Unsubscribe: <https:\/\/site\.example\/u\/x>\r$/m)
    expect(got[0]).toMatch(/^Subject: About a\r$/m)
    expect(await listMails(scratch.db)).toMatchObject([{ status: 'sent', attempts: 1, error: null }])
  })
  it('one occasion is one mail, whoever queues it again and whenever', async () => {
    expect(await queueMail(scratch.db, mail('a'))).toBe(true)
    await sendDueMails(scratch.db, transport, { from })
    expect(await queueMail(scratch.db, mail('a'))).toBe(false)
    await sendDueMails(scratch.db, transport, { from })
    expect(got).toHaveLength(1)
  })
  it('goes out only if the transaction that queued it commits', async () => {
    await scratch.db.transaction(async (trx) => { await queueMail(trx, mail('a')); throw new Error('no') }).catch(() => {})
    await sendDueMails(scratch.db, transport, { from })
    expect(got).toHaveLength(0)
  })
  it('several senders at once send each mail once', async () => {
    for (let i = 0; i < 20; i++) await queueMail(scratch.db, mail(`m${i}`))
    await Promise.all(Array.from({ length: 4 }, () => sendDueMails(scratch.db, transport, { from })))
    expect(new Set(got.map(text => /^Subject: (.*)\r$/m.exec(text)![1])).size).toBe(20)
    expect(got).toHaveLength(20)
  })
  it('a 4xx answer (RFC 5321, 4.2.1: transient) waits and tries again, and fails in the end', async () => {
    await queueMail(scratch.db, mail('a', 'full@site.example'))
    let now = new Date()
    const waits: number[] = []
    for (let i = 0; i < 7; i++) {
      await sendDueMails(scratch.db, transport, { from, clock: () => now })
      const [row] = await listMails(scratch.db)
      if (row.status === 'failed') break
      waits.push(row.nextAttemptAt.getTime() - now.getTime())
      now = row.nextAttemptAt
    }
    expect(waits).toEqual([...waits].sort((a, b) => a - b))
    expect(waits).toHaveLength(6)
    expect((await listMails(scratch.db))[0]).toMatchObject({ status: 'failed', attempts: 7 })
  })
  it('a 5xx answer (permanent) fails at once; an admin may have it tried again', async () => {
    await queueMail(scratch.db, mail('a', 'nobody@site.example'))
    await sendDueMails(scratch.db, transport, { from })
    const [row] = await listMails(scratch.db)
    expect(row).toMatchObject({ status: 'failed', attempts: 1, error: expect.stringContaining('550') })
    delete answers.nobody
    expect(await retryFailedMail(scratch.db, row.id)).toBe(true)
    expect(await sendDueMails(scratch.db, transport, { from })).toBe(1)
    answers.nobody = 550
  })
  it('a sender that died in the middle: another takes over later, not before, with the same Message-ID', async () => {
    await queueMail(scratch.db, mail('a'))
    const now = new Date()
    await takeDueMail(scratch.db, now, new Date(now.getTime() + 300_000))
    expect(await sendDueMails(scratch.db, transport, { from, clock: () => now })).toBe(0)
    expect(await sendDueMails(scratch.db, transport, { from, clock: () => new Date(now.getTime() + 300_001) })).toBe(1)
    const id = /^Message-ID: (.*)\r$/m.exec(got[0])![1]
    await scratch.db('mails').update({ status: 'waiting' })
    await sendDueMails(scratch.db, transport, { from, clock: () => new Date(now.getTime() + 600_002) })
    expect(/^Message-ID: (.*)\r$/m.exec(got[1])![1]).toBe(id)
  })
})

describe('catcher', () => {
  it('keeps what it gets, readable as text and as HTML, whatever the letters', async () => {
    const catcher = await catchMails(scratch.db)
    const own = createTransport({ url: catcher.url } as never)
    await own.sendMail({ from, to: 'vera@site.example', subject: 'Öfen und Trockner: 3 Kreise schwingen, seit Montag und noch länger', text: 'Grüße aus dem Kesselhaus', html: '<b>Grüße</b>' })
    own.close()
    await catcher.close()
    const [caught] = await listCaughtMails(scratch.db)
    expect(caught).toMatchObject({ to: ['vera@site.example'], from: 'fettle@site.example', subject: 'Öfen und Trockner: 3 Kreise schwingen, seit Montag und noch länger' })
    const read = await readCaughtMail(scratch.db, caught.id)
    expect(read!.text).toContain('Grüße aus dem Kesselhaus')
    expect(read!.html).toContain('<b>Grüße</b>')
  })
})
