import knex from 'knex'
import type { Knex } from 'knex'
import pg from 'pg'

// int8 as number: ids and counts here stay far below 2^53, and a string id would never equal a number id.
pg.types.setTypeParser(20, Number)
// numeric as number for the same reason; no column of ours needs more digits than a double carries.
pg.types.setTypeParser(1700, Number)

export type Database = Knex | Knex.Transaction

/** Opens a pool on a PostgreSQL URL. pg's `binary: true` is never used: it corrupts bytea results silently. */
export function openDatabase(url: string, { poolSize = 8, name = 'fettle' }: { poolSize?: number, name?: string } = {}): Knex {
  return knex({
    client: 'pg',
    connection: { connectionString: url, application_name: name },
    pool: { min: 0, max: poolSize, acquireTimeoutMillis: 15_000 },
  })
}
