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
  try { await client.connect(); await client.query('select 1') }
  catch (error) { throw new Stop(`The database of DATABASE_URL cannot be used: ${error.message || error.code}. Is the server up, and are name, password and database right?`) }
  finally { await client.end().catch(() => {}) }
}
