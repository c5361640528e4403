import { listSavedViews } from '../../../db/repositories/savedViews'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  return { views: await listSavedViews(database(), userId!) }
})
