import type { Database } from '../../../db/knex'
import { deleteSavedView, listSavedViews, saveView, savedViewNameTaken, updateSavedView } from '../../../db/repositories/savedViews'
import type { SavedView } from '../../../shared/types/fleet'
import { atLeast, type Role } from '../../../shared/types/people'
import { Refusal } from '../refusal'

interface By { userId: number, role: Role }

function mayShare(by: By): void {
  if (!atLeast(by.role, 'engineer')) throw new Refusal(403, 'not_allowed', 'Sharing a view with everyone needs the role engineer; save it for yourself instead.')
}
const absent = () => new Refusal(404, 'not_found', 'This saved view was not found, or is not yours to change.')

export async function addView(db: Database, by: By, view: { name: string, query: string, shared: boolean }): Promise<SavedView[]> {
  if (view.shared) mayShare(by)
  await saveView(db, by.userId, view)
  return listSavedViews(db, by.userId)
}

export async function changeView(db: Database, by: By, id: number, change: Partial<{ name: string, query: string, shared: boolean }>): Promise<SavedView[]> {
  if (change.shared) mayShare(by)
  if (change.name !== undefined && await savedViewNameTaken(db, by.userId, change.name, id)) throw new Refusal(409, 'name_taken', `You already have a view named "${change.name}".`)
  if (Object.keys(change).length && !await updateSavedView(db, by.userId, id, change)) throw absent()
  return listSavedViews(db, by.userId)
}

export async function removeView(db: Database, by: By, id: number): Promise<SavedView[]> {
  if (!await deleteSavedView(db, by.userId, id)) throw absent()
  return listSavedViews(db, by.userId)
}
