import { spawn, type ChildProcess } from 'node:child_process'
import { randomBytes } from 'node:crypto'
import { mkdirSync, mkdtempSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import type { Knex } from 'knex'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { makeExport } from '../../bench/makeExport'
import { openDatabase } from '../../db/knex'
import { migrate } from '../../db/migrate'
import { findImport, type ImportRow } from '../../db/repositories/imports'
import { buildWorker } from '../../scripts/lib/build.mjs'
import { startCluster } from '../../scripts/lib/cluster.mjs'
import { recordUpload } from '../../server/services/imports/receiveUpload'

/** A worker is killed, or its database goes away, at bad moments: nothing half done is ever seen, and the work is finished. */
const folder = mkdtempSync(join(tmpdir(), 'fettle-faults-'))
const clusterFolder = `/var/tmp/fettle-test-${randomBytes(5).toString('hex')}`
let cluster: Awaited<ReturnType<typeof startCluster>>
let url: string
let db: Knex
let worker: ChildProcess | null = null

const LOOPS = 30
const DAYS = 4
const ROWS = DAYS * 8640

function start(): ChildProcess {
  worker = spawn(process.execPath, [join(import.meta.dirname, '../../.build/worker/worker.mjs')], {
    env: { ...process.env, NODE_ENV: 'production', DATABASE_URL: url, DATA_DIR: folder, DEMO: 'off', WORKER_THREADS: '2', SMTP_URL: 'smtp://127.0.0.1:9' }, stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
  })
  return worker
}
const ended = (child: ChildProcess) => new Promise<void>(resolve => child.exitCode !== null || child.signalCode !== null ? resolve() : child.once('exit', () => resolve()))
async function kill(): Promise<void> {
  worker!.kill('SIGKILL')
  await ended(worker!)
}
async function until(id: number, wanted: (i: ImportRow) => boolean): Promise<ImportRow> {
  for (;;) {
    const found = await findImport(db, id).catch(() => null)
    if (found && wanted(found)) return found
    if (found?.status === 'failed') throw new Error(found.error!)
    await new Promise(r => setTimeout(r, 15))
  }
}
async function send(name: string): Promise<number> {
  const { id } = await recordUpload(db, { name, options: {}, idempotencyKey: null, sender: { userId: null, tokenId: null, name: 'test' }, dataDir: folder, limitBytes: 1e10, fileKey: name, bytes: statSync(join(folder, 'uploads', name)).size, sha256: '' })
  return id
}
const count = async (table: string) => Number((await db(table).count())[0].count)

beforeAll(async () => {
  if (!process.env.FETTLE_BUILT) await buildWorker()
  cluster = await startCluster(clusterFolder, { scratch: true })
  const admin = openDatabase(cluster.url('postgres'), { poolSize: 1 })
  await admin.raw('create database faults')
  await admin.destroy()
  url = cluster.url('faults')
  db = openDatabase(url, { poolSize: 2 })
  await migrate(db)
  mkdirSync(join(folder, 'uploads'))
  for (const name of ['one', 'two', 'three']) await makeExport({ path: join(folder, 'uploads', name), loops: LOOPS, days: DAYS, intervalS: 10, layout: 'wide', seed: 3 })
  writeFileSync(join(folder, 'uploads', 'small'), 'time,FIC-1.PV\n2026-11-23T06:00:00Z,1\n')
}, 180_000)
afterAll(async () => {
  worker?.kill('SIGKILL')
  await db?.destroy()
  await cluster?.stop()
  rmSync(folder, { recursive: true, force: true })
  rmSync(clusterFolder, { recursive: true, force: true })
})

describe('a worker that is killed', () => {
  it('in the middle of reading leaves nothing visible, and the next one finishes with the whole file', async () => {
    const id = await send('one')
    start()
    await until(id, i => i.status === 'reading')
    await kill()
    expect(await count('trend_blocks')).toBe(0)
    expect(await count('loops')).toBe(0)
    start()
    // in the middle of assessing as well
    await until(id, i => i.status === 'assessing' && i.assessed > 0)
    await kill()
    start()
    const done = await until(id, i => i.status === 'done')
    expect(done).toMatchObject({ rows: ROWS, samples: ROWS * LOOPS * 4, rejected: 0, changed: 0, assessed: LOOPS, weeks: ['2026-W48'] })
    expect(await count('loop_weeks')).toBe(LOOPS)
    expect(await count('trend_blocks')).toBe(LOOPS * DAYS)
    expect(await count('assessments_due')).toBe(0)
    // no loop-week was written twice
    expect(await count('loop_week_history')).toBe(0)
  }, 240_000)

  it('ends at once on SIGTERM and takes the rest up at the next start', async () => {
    await db.raw('truncate loops, imports cascade')
    const id = await send('two')
    await until(id, i => i.status === 'reading')
    worker!.kill('SIGTERM')
    await ended(worker!)
    start()
    expect(await until(id, i => i.status === 'done')).toMatchObject({ rows: ROWS, assessed: LOOPS })
  }, 240_000)
})

describe('a database that restarts under the worker', () => {
  it('is waited for, and the upload goes in whole', async () => {
    await db.raw('truncate loops, imports cascade')
    const id = await send('three')
    // on a quick machine the reading is over in a moment; a restart while it assesses is as bad a moment
    await until(id, i => i.status === 'reading' || i.status === 'assessing')
    await cluster.stop()
    await new Promise(r => setTimeout(r, 1500))
    cluster = await startCluster(clusterFolder, { scratch: true })
    expect(await until(id, i => i.status === 'done')).toMatchObject({ rows: ROWS, samples: ROWS * LOOPS * 4, changed: 0, assessed: LOOPS })
    expect(worker!.exitCode).toBeNull()
    // and goes on working
    const next = await send('small')
    expect(await until(next, i => i.status === 'done')).toMatchObject({ rows: 1, samples: 1 })
  }, 240_000)
})
