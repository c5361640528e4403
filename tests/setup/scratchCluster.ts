import { startScratchCluster } from '../../scripts/lib/cluster.mjs'
import { openDatabase } from '../../db/knex'
import { migrate } from '../../db/migrate'

export const TEMPLATE = 'fettle_template'

/**
 * The cluster that tests make their databases in, as the URL of its `postgres` database. `npm test` starts one and names
 * it in FETTLE_TEST_CLUSTER; a single vitest run starts its own. Either way it holds one migrated template database.
 */
export async function useScratchCluster(): Promise<{ url: string, stop: () => Promise<unknown> }> {
  const given = process.env.FETTLE_TEST_CLUSTER
  const own = given ? null : await startScratchCluster()
  const url = given ?? own!.url('postgres')
  const db = openDatabase(url, { poolSize: 1 })
  try {
    // Several runs may share a cluster: the first makes the template.
    await db.raw('select pg_advisory_lock(4211)')
    const { rows } = await db.raw('select 1 from pg_database where datname = ?', [TEMPLATE])
    if (!rows.length) {
      await db.raw(`create database ${TEMPLATE}`)
      const template = openDatabase(databaseUrl(url, TEMPLATE), { poolSize: 1 })
      try { await migrate(template) }
      finally { await template.destroy() }
    }
  }
  finally { await db.destroy() }
  return { url, stop: async () => { await own?.stop() } }
}

export function databaseUrl(clusterUrl: string, name: string): string {
  const url = new URL(clusterUrl)
  url.pathname = `/${name}`
  return url.href
}
