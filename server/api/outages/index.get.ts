import { listOutages } from '../../../db/repositories/outages'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  return await listOutages(database())
})
