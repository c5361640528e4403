import { statSync } from 'node:fs'
import { dataFolder } from './lib/dataFolder.mjs'
import { ensureNodePackages } from './lib/nodePackages.mjs'
import { command, say, Stop } from './lib/say.mjs'
import { withSiteDatabase } from './lib/siteDatabase.mjs'
import { writeState } from './lib/stateFile.mjs'

await command(async () => {
  const [file] = process.argv.slice(2)
  if (!file) throw new Stop('Say which file to write: npm run backup -- fettle-backup.tar')
  await ensureNodePackages()
  const dataDir = dataFolder()
  const written = await withSiteDatabase(dataDir, ({ url, programs }) => writeState({ url, dataDir, file, programs }))
  if (process.env.FILES_S3_BUCKET) say(`Photos and files of tickets lie in the bucket ${process.env.FILES_S3_BUCKET} and are NOT in this backup; save the bucket by its own means.`)
  say(`Saved to ${written} (${(statSync(written).size / 1e6).toFixed(1)} MB). It holds everything but the secrets of this machine; keep it as safe as the plant's other records.`)
})
