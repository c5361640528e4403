import { existsSync, mkdirSync, readdirSync, readFileSync, rmdirSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { built, root, webEntry, workerFolder } from './paths.mjs'
import { run } from './run.mjs'
import { say } from './say.mjs'
import { hashOf, webSources, workerSources } from './sources.mjs'

const stamped = (name, hash) => existsSync(`${built}/${name}.hash`) && readFileSync(`${built}/${name}.hash`, 'utf8') === hash
const stamp = (name, hash) => writeFileSync(`${built}/${name}.hash`, hash)

/** Two processes that build at once would tear each other's output: the second waits. A lock of a dead process falls after 10 minutes. */
async function alone(work) {
  mkdirSync(built, { recursive: true })
  const lock = `${built}/building`
  for (;;) {
    try { mkdirSync(lock); break }
    catch {
      const since = statSync(lock, { throwIfNoEntry: false })?.mtimeMs
      if (since && Date.now() - since > 600_000) rmSync(lock, { recursive: true, force: true })
      await new Promise(resolve => setTimeout(resolve, 300))
    }
  }
  const letGo = () => { try { rmdirSync(lock) } catch { /* already gone */ } }
  process.once('exit', letGo)
  try { return await work() }
  finally { letGo(); process.off('exit', letGo) }
}

/** Bundles what runs outside the web process: worker, its threads, migrations, demo seed. */
export function buildWorker() {
  return alone(async () => {
    const hash = hashOf(workerSources)
    if (stamped('worker', hash) && existsSync(workerFolder)) return
    const threads = existsSync(`${root}/server/threads`) ? readdirSync(`${root}/server/threads`).filter(f => f.endsWith('.ts')) : []
    const entries = {
      environment: 'server/services/environment.ts', worker: 'server/worker.ts', migrate: 'server/migrate.ts', seed: 'server/seed.ts',
      ...Object.fromEntries(threads.map(f => [`threads/${f.replace(/\.ts$/, '')}`, `server/threads/${f}`])),
    }
    const { build } = await import('esbuild')
    rmSync(workerFolder, { recursive: true, force: true })
    await build({
      absWorkingDir: root,
      entryPoints: Object.fromEntries(Object.entries(entries).filter(([, file]) => existsSync(`${root}/${file}`))),
      outdir: workerFolder, outExtension: { '.js': '.mjs' }, chunkNames: 'chunks/[name]-[hash]',
      bundle: true, splitting: true, platform: 'node', format: 'esm', target: 'node20', packages: 'external', sourcemap: 'linked',
      alias: { '#shared': `${root}/shared` }, logLevel: 'error',
    })
    stamp('worker', hash)
  })
}

/** Builds the web application when one of its sources changed. */
export function buildWeb() {
  return alone(async () => {
    const hash = hashOf(webSources)
    if (stamped('web', hash) && existsSync(webEntry)) return
    say('Building the application (about a minute) ...')
    const started = Date.now()
    await run(`${root}/node_modules/.bin/nuxi`, ['build'], { cwd: root, env: { ...process.env, NODE_ENV: 'production', NUXT_TELEMETRY_DISABLED: '1' }, quiet: true, orStop: 'The application could not be built; see above.' })
    stamp('web', hash)
    say(`Built in ${Math.round((Date.now() - started) / 1000)} s.`)
  })
}
