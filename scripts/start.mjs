import { existsSync } from 'node:fs'
import { buildWeb, buildWorker } from './lib/build.mjs'
import { clusterFolder, ensureDatabase, startCluster } from './lib/cluster.mjs'
import { claim, dataFolder, secrets } from './lib/dataFolder.mjs'
import { ensureDebianPackages } from './lib/debianPackages.mjs'
import { tryPort } from './lib/freePort.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { root, webEntry, workerFolder } from './lib/paths.mjs'
import { createProcesses } from './lib/processes.mjs'
import { run } from './lib/run.mjs'
import { command, Interrupted, say, Stop } from './lib/say.mjs'
import { checkedSettings, reachDatabase } from './lib/settings.mjs'
import { workerArguments } from './lib/workerArguments.mjs'

const dev = process.argv.includes('--dev')

async function answers(url, stillRuns) {
  for (let tries = 0; tries < 600 && stillRuns(); tries++) {
    try { if ((await fetch(url)).status < 500) return true }
    catch { /* not up yet */ }
    await new Promise(resolve => setTimeout(resolve, 100))
  }
  return false
}

await command(async () => {
  let ended
  const end = new Promise((resolve) => { ended = resolve })
  const asked = new AbortController()
  const { signal } = asked
  const stop = () => {
    asked.abort()
    ended(null)
  }
  for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(name, stop)
  if (process.env.npm_lifecycle_event) {
    // npm does not always pass its own end on
    const parent = process.ppid
    setInterval(() => { if (process.ppid !== parent) stop() }, 1000).unref()
  }
  const goOn = () => { if (signal.aborted) throw new Interrupted() }

  // What a person has to install is said before anything takes its time.
  if (!process.env.DATABASE_URL) await ensureDebianPackages(['postgresql'])
  await ensureNodePackages(signal)
  await buildWorker()
  goOn()
  const folder = dataFolder()
  const own = { ...process.env, DATA_DIR: folder }
  // The address of the private cluster is known only once it runs; everything else is checked before anything starts.
  const settings = await checkedSettings({ ...own, DATABASE_URL: own.DATABASE_URL || 'postgres://later' })
  const freed = Date.now() + 3000
  let port = await tryPort(settings.PORT, settings.HOST)
  // a server whose start was killed needs a moment to notice it
  while (port.code === 'EADDRINUSE' && Date.now() < freed) {
    await new Promise(resolve => setTimeout(resolve, 200))
    port = await tryPort(settings.PORT, settings.HOST)
  }
  if (!port.free) {
    throw new Stop(port.code === 'EADDRINUSE'
      ? `Port ${settings.PORT} on ${settings.HOST} is taken by another program. Stop that program, or choose another port: PORT=3001 npm start`
      : `Fettle cannot listen on ${settings.HOST}, port ${settings.PORT} (${port.code}). Set HOST to an address of this machine and PORT to a number that you may use.`)
  }
  claim(folder)
  if (!dev) await buildWeb(signal)
  goOn()

  const kept = secrets(folder)
  let cluster
  let databaseUrl = process.env.DATABASE_URL
  const processes = createProcesses((name, how) => ended(`The ${name} ended unexpectedly (${how}). Everything else is stopped as well; its words are above.`))
  try {
    if (databaseUrl) await reachDatabase(databaseUrl)
    else {
      cluster = await startCluster(await clusterFolder(folder))
      databaseUrl = await ensureDatabase(cluster, 'fettle')
    }
    goOn()
    const env = {
      ...own,
      NODE_ENV: dev ? 'development' : 'production',
      DATABASE_URL: databaseUrl, HOST: settings.HOST, PORT: String(settings.PORT), NITRO_HOST: settings.HOST, NITRO_PORT: String(settings.PORT),
      PUBLIC_URL: settings.PUBLIC_URL, DEMO: settings.DEMO,
      NUXT_SESSION_PASSWORD: process.env.NUXT_SESSION_PASSWORD || kept.sessionPassword,
      // A browser drops a Secure cookie on plain http beyond loopback; the application shows a banner there.
      NUXT_SESSION_COOKIE_SECURE: String(settings.PUBLIC_URL.startsWith('https:')),
      // Event streams stay open: without a limit the server would wait for them.
      NITRO_SHUTDOWN_TIMEOUT: '1500',
    }
    const prepare = await run(process.execPath, [`${workerFolder}/migrate.mjs`], { env: { ...env, DEMO_PASSWORDS: JSON.stringify(kept.demoPasswords) }, quiet: true, signal })
    const lines = prepare.output.trim().split('\n')
    if (prepare.code !== 0) throw new Stop(`The database could not be prepared.\n${lines.slice(-15).join('\n')}`)
    const prepared = JSON.parse(lines.at(-1))
    if (!prepared.accounts) throw new Stop('There is no account to sign in with yet. Set ADMIN_EMAIL and ADMIN_PASSWORD (12 characters or more) for the first one, then start again.')
    if (prepared.demoToSeed && existsSync(`${workerFolder}/seed.mjs`)) {
      say('Making the demo plant (once) ...')
      await run(process.execPath, [...workerArguments, `${workerFolder}/seed.mjs`], { env, signal, ipc: true, orStop: 'The demo plant could not be made; see above. The next start tries again; DEMO=off starts without it.' })
      await run(process.execPath, [`${workerFolder}/migrate.mjs`, '--demo-seeded'], { env, quiet: true, orStop: 'The database does not answer.' })
    }

    goOn()
    processes.launch('worker', process.execPath, ['--enable-source-maps', ...workerArguments, `${workerFolder}/worker.mjs`], env)
    if (dev) processes.launch('web server', `${root}/node_modules/.bin/nuxi`, ['dev', '--host', settings.HOST, '--port', String(settings.PORT)], env)
    else processes.launch('web server', process.execPath, [webEntry], env)

    let over = false
    end.then(() => { over = true })
    const reach = `http://${settings.HOST === '0.0.0.0' || settings.HOST === '::' ? '127.0.0.1' : settings.HOST}:${settings.PORT}`
    if (await answers(`${reach}/api/health`, () => !over)) {
      say(`\nFettle runs at ${settings.PUBLIC_URL}   (Ctrl-C stops it)`)
      if (settings.DEMO === 'on') {
        say('\nDemo accounts (DEMO=off locks them):')
        for (const [email, password] of Object.entries(kept.demoPasswords)) say(`  ${email.padEnd(28)} ${password}`)
      }
      if (!process.env.SMTP_URL) say('\nNo SMTP_URL is set: mail stays here and can be read at /admin/mail.')
    }
    else if (!over) throw new Stop(`The web server does not answer at ${reach}; its words are above.`)
    const reason = await end
    if (reason) throw new Stop(reason)
    say('\nStopping ...')
    return 0
  }
  finally {
    await processes.stopAll()
    // also one that a killed start left running: the data folder is ours alone
    await cluster?.stop()
  }
})
// A watch timer or an open handle must not hold the prompt back.
process.exit()
