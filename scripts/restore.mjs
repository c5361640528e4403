import { claim, dataFolder } from './lib/dataFolder.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { command, say, Stop } from './lib/say.mjs'
import { withSiteDatabase } from './lib/siteDatabase.mjs'
import { readState } from './lib/stateFile.mjs'

await command(async () => {
  const file = process.argv.slice(2).find(word => !word.startsWith('--'))
  if (!file) throw new Stop('Say which file to read: npm run restore -- fettle-backup.tar')
  await ensureNodePackages()
  const dataDir = dataFolder()
  claim(dataDir)
  const about = await withSiteDatabase(dataDir, ({ url, programs }) => readState({ url, dataDir, file, replace: process.argv.includes('--replace'), programs }))
  say(`Restored what was saved on ${about.madeAt.slice(0, 16).replace('T', ' at ')} UTC by version ${about.version}. Start it with npm start.`)
})
