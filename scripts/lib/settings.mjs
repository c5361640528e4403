import { pathToFileURL } from 'node:url'
import { workerFolder } from './paths.mjs'
import { Stop } from './say.mjs'

/** Settings of the environment, checked by the same rules that the processes use (the worker bundle must be built). */
export async function checkedSettings(env) {
  const { readEnvironment } = await import(pathToFileURL(`${workerFolder}/environment.mjs`).href)
  try { return readEnvironment(env) }
  catch (error) { throw new Stop(error.message) }
}

/** Answers when the database of a URL answers; says what to do when it does not. */
export async function reachDatabase(url) {
  const { default: pg } = await import('pg')
  const client = new pg.Client({ connectionString: url, connectionTimeoutMillis: 10_000 })
  try {
    await client.connect()
    const { rows: [is] } = await client.query(`select current_user as role, current_database() as name, current_setting('server_version_num')::int as version, current_setting('server_encoding') as encoding,
      has_database_privilege(current_database(), 'create') and coalesce(has_schema_privilege(to_regnamespace('public'), 'create'), true) as may`)
    if (is.version < 140_000) throw new Stop(`The server of DATABASE_URL is PostgreSQL ${Math.floor(is.version / 10_000)}; Fettle needs 14 or newer.`)
    if (is.encoding !== 'UTF8') throw new Stop(`The database "${is.name}" of DATABASE_URL has the encoding ${is.encoding}. Make one for Fettle: createdb --encoding=UTF8 --template=template0 --owner=${is.role} fettle`)
    if (!is.may) throw new Stop(`The role "${is.role}" may not make tables in the database "${is.name}" of DATABASE_URL. Make the role its owner: alter database "${is.name}" owner to "${is.role}"`)
  }
  catch (error) {
    if (error instanceof Stop) throw error
    throw new Stop(`The database of DATABASE_URL cannot be used: ${error.message || error.code}. Is the server up, and are name, password and database right?`)
  }
  finally { await client.end().catch(() => {}) }
}
