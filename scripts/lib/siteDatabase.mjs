import { clusterFolder, ensureDatabase, startCluster } from './cluster.mjs'
import { runningStart } from './dataFolder.mjs'
import { ensureDebianPackages, postgresPrograms } from './debianPackages.mjs'
import { reachDatabase } from './settings.mjs'

/** The database of the site, whether Fettle runs or not: of DATABASE_URL, or the private cluster, started for the while. */
export async function withSiteDatabase(dataDir, work) {
  await ensureDebianPackages(['postgresql'])
  if (process.env.DATABASE_URL) {
    await reachDatabase(process.env.DATABASE_URL)
    return await work({ url: process.env.DATABASE_URL, programs: postgresPrograms() })
  }
  const cluster = await startCluster(await clusterFolder(dataDir))
  try { return await work({ url: await ensureDatabase(cluster, 'fettle'), programs: cluster.programs }) }
  // a start that came meanwhile uses it and stops it
  finally { if (cluster.startedHere && !runningStart(dataDir)) await cluster.stop() }
}
