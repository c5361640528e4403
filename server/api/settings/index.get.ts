import { getSettings } from '../../services/settings'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  return await getSettings(database())
})
