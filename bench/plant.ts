import { spawn, type ChildProcess } from 'node:child_process'
import { once } from 'node:events'
import { createReadStream, mkdtempSync, readFileSync, rmSync, statSync } from 'node:fs'
import { request, type IncomingMessage } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { json } from 'node:stream/consumers'
import { pipeline } from 'node:stream/promises'
import type { Knex } from 'knex'
import { openDatabase } from '../db/knex'
import { migrate } from '../db/migrate'
import { freePort } from '../scripts/lib/freePort.mjs'
import { workerArguments } from '../scripts/lib/workerArguments.mjs'
import { makeToken } from '../server/services/tokens'

const root = join(import.meta.dirname, '..')

/** Web server and workers as they are started for people, on a database with its usual safe settings. */
export class Plant {
  readonly dataDir = mkdtempSync(join(tmpdir(), 'fettle-bench-'))
  web: ChildProcess | null = null
  workers: ChildProcess[] = []
  private port = 0
  private token = ''

  private constructor(readonly url: string, readonly db: Knex) {}

  static async open(url: string): Promise<Plant> {
    const db = openDatabase(url, { poolSize: 4 })
    await migrate(db)
    const plant = new Plant(url, db)
    plant.token = (await makeToken(db, { name: 'bench', scopes: ['read', 'import'] }, { userId: null, name: 'bench' })).token
    return plant
  }

  private launch(file: string, env: Record<string, string> = {}): ChildProcess {
    return spawn(process.execPath, [...(file.includes('worker') ? workerArguments : []), join(root, file)], {
      env: { ...process.env, NODE_ENV: 'production', DATABASE_URL: this.url, DATA_DIR: this.dataDir, HOST: '127.0.0.1', PORT: String(this.port), NITRO_HOST: '127.0.0.1', NITRO_PORT: String(this.port), PUBLIC_URL: `http://127.0.0.1:${this.port}`, DEMO: 'off', NUXT_SESSION_PASSWORD: 'x'.repeat(40), SMTP_URL: 'smtp://127.0.0.1:9', ...env },
      stdio: ['ignore', 'ignore', 'inherit', 'ipc'],
    })
  }

  async startWeb(): Promise<void> {
    this.port = await freePort()
    this.web = this.launch('.output/server/index.mjs')
    for (let i = 0; i < 300; i++) {
      if (await this.get('/api/health').then(() => true, () => false)) return
      await new Promise(r => setTimeout(r, 100))
    }
    throw new Error('The web server did not start.')
  }

  async startWorkers(n: number, threads?: number): Promise<void> {
    for (let i = 0; i < n; i++) this.workers.push(this.launch('.build/worker/worker.mjs', threads ? { WORKER_THREADS: String(threads) } : {}))
    await this.listeners(n)
  }

  /** Waits until so many workers listen. */
  private async listeners(n: number): Promise<void> {
    for (;;) {
      const { rows } = await this.db.raw(`select count(*)::int as n from pg_stat_activity where application_name = 'fettle-listener' and datname = current_database()`)
      if (rows[0].n === n) return
      await new Promise(r => setTimeout(r, 20))
    }
  }

  async stopWorkers(): Promise<void> {
    if (this.workers.length === 0) return
    await Promise.all(this.workers.map(stop))
    this.workers = []
    await this.listeners(0)
  }

  async get<T = any>(path: string): Promise<T> {
    const answer = await fetch(`http://127.0.0.1:${this.port}${path}`, { headers: { authorization: `Bearer ${this.token}` } })
    if (!answer.ok) throw new Error(`${path}: ${answer.status} ${await answer.text()}`)
    return await answer.json() as T
  }

  /** Sends a file over HTTP as a historian job would. */
  async send(path: string): Promise<number> {
    // fetch takes two seconds of processor for a hundred megabytes, on the cores that are measured; a plain request next to none
    const sending = request({ host: '127.0.0.1', port: this.port, path: '/api/imports?name=bench', method: 'POST', headers: { 'authorization': `Bearer ${this.token}`, 'content-length': statSync(path).size } })
    const answered = once(sending, 'response') as Promise<[IncomingMessage]>
    await pipeline(createReadStream(path, { highWaterMark: 1 << 18 }), sending)
    const [answer] = await answered
    const body = await json(answer) as { id: number }
    if (answer.statusCode !== 202) throw new Error(JSON.stringify(body))
    return body.id
  }

  async done(id: number): Promise<Record<string, any>> {
    for (;;) {
      const { status, error } = await this.db('imports').where({ id }).first('status', 'error')
      if (status === 'failed') throw new Error(error)
      if (status === 'done') return await this.db('imports').where({ id }).first()
      await new Promise(r => setTimeout(r, 20))
    }
  }

  /** Takes everything away that uploads made. */
  async clear(): Promise<void> {
    await this.db.raw('truncate loops, imports, assessments_due, weeks_due cascade')
    await this.db.raw('checkpoint')
  }

  async stop(): Promise<void> {
    await this.stopWorkers()
    if (this.web) await stop(this.web)
    await this.db.destroy()
    rmSync(this.dataDir, { recursive: true, force: true })
  }
}

/** Peak resident memory of a process, MB. */
export const peakMb = (child: ChildProcess): number => Number(/VmHWM:\s+(\d+)/.exec(readFileSync(`/proc/${child.pid}/status`, 'utf8'))![1]) / 1024
export const nowMb = (child: ChildProcess): number => Number(/VmRSS:\s+(\d+)/.exec(readFileSync(`/proc/${child.pid}/status`, 'utf8'))![1]) / 1024

function stop(child: ChildProcess): Promise<void> {
  return new Promise((resolve) => {
    if (child.exitCode !== null || child.signalCode !== null) return resolve()
    const hard = setTimeout(() => child.kill('SIGKILL'), 8000)
    child.once('exit', () => {
      clearTimeout(hard)
      resolve()
    })
    child.kill('SIGTERM')
  })
}
