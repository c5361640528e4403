import type { Database } from '../knex'
import type { SavedView } from '../../shared/types/fleet'

/** A person's own views and those that others share, own first. */
export async function listSavedViews(db: Database, userId: number): Promise<SavedView[]> {
  const rows = await db('saved_views as v').join('users as u', 'u.id', 'v.user_id').where('v.user_id', userId).orWhere('v.shared', true)
    .orderByRaw('(v.user_id = ?) desc, lower(v.name)', [userId]).select('v.id', 'v.name', 'v.query', 'v.shared', 'v.user_id', 'u.name as owner')
  return rows.map(r => ({ id: r.id, name: r.name, query: r.query, shared: r.shared, mine: r.user_id === userId, owner: r.owner }))
}

/** Saves a view; one of the same name and person is replaced, because that is what saving again means. */
export async function saveView(db: Database, userId: number, view: { name: string, query: string, shared: boolean }): Promise<number> {
  const [row] = await db('saved_views').insert({ user_id: userId, ...view }).onConflict(['user_id', 'name']).merge(['query', 'shared']).returning('id')
  return row.id
}

/** Changes a person's own view; false when it is not theirs or not there. */
export async function updateSavedView(db: Database, userId: number, id: number, change: Partial<{ name: string, query: string, shared: boolean }>): Promise<boolean> {
  return await db('saved_views').where({ id, user_id: userId }).update(change) > 0
}

export async function deleteSavedView(db: Database, userId: number, id: number): Promise<boolean> {
  return await db('saved_views').where({ id, user_id: userId }).delete() > 0
}

export async function savedViewNameTaken(db: Database, userId: number, name: string, exceptId: number): Promise<boolean> {
  return Boolean(await db('saved_views').where({ user_id: userId, name }).whereNot({ id: exceptId }).first('id'))
}
