import type { Knex } from 'knex'
import { openDatabase } from '../../db/knex'
import { environment } from './environment'

let pool: Knex | undefined

/** The web process's pool, opened on first use. */
export function database(): Knex {
  pool ??= openDatabase(environment().DATABASE_URL)
  return pool
}

export async function closeDatabase(): Promise<void> {
  const open = pool
  pool = undefined
  await open?.destroy()
}
