import { listAreas } from '../../../db/repositories/site'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  return await listAreas(database())
})
