import type { Database } from '../knex'

/** Settings of the site as stored: one JSON value per key; defaults live in server/services/settings. */
export async function readSettings(db: Database): Promise<Record<string, unknown>> {
  const rows = await db('settings').select('key', 'value')
  return Object.fromEntries(rows.map(r => [r.key, r.value]))
}

export async function readSetting(db: Database, key: string): Promise<unknown> {
  return (await db('settings').where({ key }).first('value'))?.value
}

export async function writeSetting(db: Database, key: string, value: unknown): Promise<void> {
  await db('settings').insert({ key, value: JSON.stringify(value), updated_at: db.fn.now() }).onConflict('key').merge()
}
