import { pathToFileURL } from 'node:url'
import { buildWorker } from './lib/build.mjs'
import { dataFolder } from './lib/dataFolder.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { workerFolder } from './lib/paths.mjs'
import { command, say, Stop } from './lib/say.mjs'
import { checkedSettings, reachDatabase } from './lib/settings.mjs'

/**
 * One more worker for the database of DATABASE_URL. It assesses; it reads the uploads that it finds in DATA_DIR, when that
 * is shared with the web server, and leaves the others to the worker there.
 */
await command(async () => {
  if (!process.env.DATABASE_URL) throw new Stop('Set DATABASE_URL to the database that this worker is to work for: DATABASE_URL=postgres://… npm run worker')
  await ensureNodePackages()
  await buildWorker()
  const settings = await checkedSettings(process.env)
  await reachDatabase(settings.DATABASE_URL)
  process.env.DATA_DIR = dataFolder()
  process.env.EXTRA_WORKER = 'on'
  await import(pathToFileURL(`${workerFolder}/worker.mjs`).href)
  say('The worker runs (Ctrl-C stops it).')
})
