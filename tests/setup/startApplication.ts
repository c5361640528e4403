import { spawn, type ChildProcess } from 'node:child_process'
import { randomBytes } from 'node:crypto'
import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { buildWeb, buildWorker } from '../../scripts/lib/build.mjs'
import { freePort } from '../../scripts/lib/freePort.mjs'

const root = join(import.meta.dirname, '../..')

export interface Application {
  baseUrl: string
  dataDir: string
  /** what the processes printed so far */
  words: () => string
  stop: () => Promise<void>
  web: ChildProcess
  worker: ChildProcess | null
}

/** Starts the built web server, and the worker unless told not to, on a database. Builds first when sources changed. */
export async function startApplication({ databaseUrl, env = {}, worker = true }: { databaseUrl: string, env?: Record<string, string>, worker?: boolean }): Promise<Application> {
  if (!process.env.FETTLE_BUILT) {
    await buildWorker()
    await buildWeb()
  }
  const dataDir = mkdtempSync(join(tmpdir(), 'fettle-data-'))
  const port = await freePort()
  const baseUrl = `http://127.0.0.1:${port}`
  const all = {
    ...process.env, NODE_ENV: 'production', DATABASE_URL: databaseUrl, DATA_DIR: dataDir, HOST: '127.0.0.1', PORT: String(port), NITRO_HOST: '127.0.0.1', NITRO_PORT: String(port),
    PUBLIC_URL: baseUrl, DEMO: 'off', NUXT_SESSION_PASSWORD: randomBytes(24).toString('hex'), NUXT_SESSION_COOKIE_SECURE: 'false', NITRO_SHUTDOWN_TIMEOUT: '1000', ...env,
  }
  let words = ''
  const launch = (file: string) => {
    // "ipc": if this test process is killed, its children end themselves
    const child = spawn(process.execPath, ['--enable-source-maps', join(root, file)], { env: all, stdio: ['ignore', 'pipe', 'pipe', 'ipc'] })
    for (const stream of [child.stdout!, child.stderr!]) stream.on('data', (chunk: Buffer) => { words += chunk.toString() })
    return child
  }
  const web = launch('.output/server/index.mjs')
  const working = worker ? launch('.build/worker/worker.mjs') : null
  const stop = async () => {
    await Promise.all([web, working].map(child => !child || child.exitCode !== null || child.signalCode !== null ? null : new Promise<void>((resolve) => {
      const hard = setTimeout(() => child.kill('SIGKILL'), 8000)
      child.once('exit', () => { clearTimeout(hard); resolve() })
      child.kill('SIGTERM')
    })))
    rmSync(dataDir, { recursive: true, force: true })
  }
  for (let tries = 0; ; tries++) {
    try {
      const health = await (await fetch(`${baseUrl}/api/health`)).json() as { database: string, worker: string }
      if (health.database === 'up' && (!worker || health.worker === 'up')) break
    }
    catch { /* not up yet */ }
    if (tries > 300 || web.exitCode !== null) {
      await stop()
      throw new Error(`The application did not start:\n${words}`)
    }
    await new Promise(resolve => setTimeout(resolve, 100))
  }
  return { baseUrl, dataDir, words: () => words, stop, web, worker: working }
}
