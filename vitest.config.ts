import { fileURLToPath } from 'node:url'
import { defineConfig } from 'vitest/config'

const root = fileURLToPath(new URL('.', import.meta.url))
const alias = { '#shared': `${root}shared`, '~~': root.slice(0, -1), '~': root.slice(0, -1) }

/** Folders of tests that need a database server; they share one cluster and make their own databases. */
const withDatabase = ['tests/db/**/*.test.ts', 'tests/api/**/*.test.ts', 'tests/faults/**/*.test.ts']
const withBrowser = ['tests/browser/**/*.test.ts']

export default defineConfig({
  test: {
    projects: [
      { resolve: { alias }, test: { name: 'unit', environment: 'node', include: ['tests/**/*.test.ts'], exclude: [...withDatabase, ...withBrowser, 'node_modules/**'], testTimeout: 60_000 } },
      { resolve: { alias }, test: { name: 'database', environment: 'node', include: withDatabase, globalSetup: ['tests/setup/database.ts'], testTimeout: 60_000, hookTimeout: 120_000, fileParallelism: false } },
      { resolve: { alias }, test: { name: 'browser', environment: 'node', include: withBrowser, globalSetup: ['tests/setup/application.ts'], testTimeout: 120_000, hookTimeout: 240_000, fileParallelism: false } },
    ],
  },
})
