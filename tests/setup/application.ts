import type { TestProject } from 'vitest/node'
import { makeAccounts, type Accounts } from './accounts'
import { scratchDatabase } from './scratchDatabase'
import { useScratchCluster } from './scratchCluster'
import { smallPlant } from './smallPlant'
import { startApplication } from './startApplication'
import { ensureDebianPackages } from '../../scripts/lib/debianPackages.mjs'

declare module 'vitest' {
  interface ProvidedContext { clusterUrl: string, baseUrl: string, databaseUrl: string, accounts: Accounts }
}

/** For tests/browser: one application with a small plant for all files. */
export default async function setup(project: TestProject) {
  await ensureDebianPackages(['chromium'])
  const cluster = await useScratchCluster()
  const database = await scratchDatabase({ clusterUrl: cluster.url })
  const accounts = await makeAccounts(database.db)
  await smallPlant(database.db)
  const application = await startApplication({ databaseUrl: database.url })
  project.provide('clusterUrl', cluster.url)
  project.provide('databaseUrl', database.url)
  project.provide('baseUrl', application.baseUrl)
  project.provide('accounts', accounts)
  return async () => {
    await application.stop()
    await database.drop()
    await cluster.stop()
  }
}
