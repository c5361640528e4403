import knex from 'knex'
import type { Knex } from 'knex'
import pg from 'pg'

// int8 as number: ids and counts here stay far below 2^53, and a string id would never equal a number id.
pg.types.setTypeParser(20, Number)
// numeric as number for the same reason; no column of ours needs more digits than a double carries.
pg.types.setTypeParser(1700, Number)

export type Database = Knex | Knex.Transaction

/** A machine that lost its power says no goodbye: the server asks after it, and frees what it had locked within a minute, not after two hours. */
export const ASK_AFTER_CLIENT = '-c tcp_keepalives_idle=20 -c tcp_keepalives_interval=10 -c tcp_keepalives_count=3'

/** Opens a pool on a PostgreSQL URL. pg's `binary: true` is never used: it corrupts bytea results silently. */
export function openDatabase(url: string, { poolSize = 8, name = 'fettle' }: { poolSize?: number, name?: string } = {}): Knex {
  return knex({
    client: 'pg',
    connection: { connectionString: url, application_name: name, options: ASK_AFTER_CLIENT },
    pool: { min: 0, max: poolSize, acquireTimeoutMillis: 15_000 },
  })
}
