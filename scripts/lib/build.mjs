import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { built, root, webEntry, workerFolder } from './paths.mjs'
import { run } from './run.mjs'
import { say } from './say.mjs'
import { hashOf, webSources, workerSources } from './sources.mjs'

const stamped = (name, hash) => existsSync(`${built}/${name}.hash`) && readFileSync(`${built}/${name}.hash`, 'utf8') === hash
const stamp = (name, hash) => writeFileSync(`${built}/${name}.hash`, hash)

/** Two processes that build at once would tear each other's output: the second waits. The lock names its process and falls with it. */
async function alone(work) {
  mkdirSync(built, { recursive: true })
  const lock = `${built}/building.pid`
  for (;;) {
    try { writeFileSync(lock, String(process.pid), { flag: 'wx' }); break }
    catch (error) {
      if (error.code !== 'EEXIST') throw error
      let holder = ''
      try { holder = readFileSync(lock, 'utf8') }
      catch { /* let go just now */ }
      if (holder && !existsSync(`/proc/${holder}`)) rmSync(lock, { force: true })
      await new Promise(resolve => setTimeout(resolve, 300))
    }
  }
  const letGo = () => rmSync(lock, { force: true })
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
export function buildWeb(signal) {
  return alone(async () => {
    const hash = hashOf(webSources)
    if (stamped('web', hash) && existsSync(webEntry)) return
    say('Building the application (about a minute) ...')
    const started = Date.now()
    // a build that outlived a killed start would tear the next one's output
    const endWithUs = 'data:text/javascript,process.on("disconnect",()=>process.exit(1));process.channel.unref()'
    await run(process.execPath, ['--import', endWithUs, `${root}/node_modules/.bin/nuxi`, 'build'], {
      ipc: true, cwd: root, env: { ...process.env, NODE_ENV: 'production', NUXT_TELEMETRY_DISABLED: '1' }, quiet: true, signal, orStop: 'The application could not be built; see above.' })
    stamp('web', hash)
    say(`Built in ${Math.round((Date.now() - started) / 1000)} s.`)
  })
}
