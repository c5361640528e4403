import type { Knex } from 'knex'
import { migrations } from './migrations/index'

/** Brings the schema up to date. Knex takes its lock, so that several processes may call this at once. */
export async function migrate(db: Knex): Promise<string[]> {
  const [, names] = await db.migrate.latest({
    tableName: 'schema_migrations',
    migrationSource: {
      getMigrations: async () => migrations.map(m => m.name),
      getMigrationName: (name: string) => name,
      getMigration: async (name: string) => {
        const found = migrations.find(m => m.name === name)
        if (!found) throw new Error(`No migration is named ${name}.`)
        return { up: found.up, down: async () => { throw new Error('Migrations only go forward; restore a backup to go back.') } }
      },
    } as Knex.MigrationSource<string>,
  })
  return names as string[]
}
