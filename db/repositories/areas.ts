import type { Database } from '../knex'

export interface AreaRow { id: number, name: string, position: number }

export async function listAreas(db: Database): Promise<AreaRow[]> {
  return await db('areas').select('id', 'name', 'position').orderBy(['position', 'name'])
}

/** The ids of areas by name, made when they are new, in the order given. */
export async function ensureAreas(trx: Database, names: string[]): Promise<Map<string, number>> {
  const wanted = [...new Set(names)]
  const known = new Map((await listAreas(trx)).map(a => [a.name, a]))
  let position = Math.max(0, ...[...known.values()].map(a => a.position))
  for (const name of wanted) {
    if (known.has(name)) continue
    const [row] = await trx('areas').insert({ name, position: ++position }).onConflict('name').merge(['name']).returning(['id', 'name', 'position'])
    known.set(name, row)
  }
  return new Map(wanted.map(name => [name, known.get(name)!.id]))
}
