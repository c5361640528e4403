import { pathToFileURL } from 'node:url'
import { buildWorker } from './lib/build.mjs'
import { dataFolder } from './lib/dataFolder.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { workerFolder } from './lib/paths.mjs'
import { command, say, Stop } from './lib/say.mjs'
import { checkedSettings, reachDatabase } from './lib/settings.mjs'

/** One more worker for the database of DATABASE_URL; uploads are read from DATA_DIR, which it must share with the web server. */
await command(async () => {
  if (!process.env.DATABASE_URL) throw new Stop('Set DATABASE_URL to the database that this worker is to work for: DATABASE_URL=postgres://… npm run worker')
  await ensureNodePackages()
  await buildWorker()
  const settings = await checkedSettings(process.env)
  await reachDatabase(settings.DATABASE_URL)
  process.env.DATA_DIR = dataFolder()
  await import(pathToFileURL(`${workerFolder}/worker.mjs`).href)
  say('The worker runs (Ctrl-C stops it).')
})
