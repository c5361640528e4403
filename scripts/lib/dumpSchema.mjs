import { postgresPrograms } from './debianPackages.mjs'
import { run } from './run.mjs'

/** The schema of a database as SQL, without what differs between versions of the dump program. */
export async function dumpSchema(url, programs = postgresPrograms()) {
  const { output } = await run(`${programs}/pg_dump`, ['--schema-only', '--no-owner', '--no-privileges', '--schema=public', url], { quiet: true, orStop: 'pg_dump failed.' })
  return `${output.split('\n').filter(line => !/^(--|SET |SELECT pg_catalog|\\(un)?restrict|CREATE SCHEMA|COMMENT ON SCHEMA)/.test(line)).join('\n').replace(/\n{2,}/g, '\n\n').trim()}\n`
}
