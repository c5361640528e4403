import { loopWeekQuerySchema } from '../../../shared/schemas/loops'
import { readGroups } from '../../services/groups/readGroups'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { week } = await readInput(event, loopWeekQuerySchema, 'query')
  return readGroups(database(), week, new Date())
})
