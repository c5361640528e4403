import type { Database } from '../knex'

export async function hasLoops(db: Database): Promise<boolean> {
  return Boolean(await db('loops').first('id'))
}
