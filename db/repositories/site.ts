import type { Database } from '../knex'

export async function hasLoops(db: Database): Promise<boolean> {
  return Boolean(await db('loops').first('id'))
}

export async function listAreas(db: Database): Promise<{ id: number, name: string }[]> {
  return await db('areas').orderBy([{ column: 'position' }, { column: 'name' }]).select('id', 'name')
}

export async function hasArea(db: Database, id: number): Promise<boolean> {
  return Boolean(await db('areas').where({ id }).first('id'))
}
