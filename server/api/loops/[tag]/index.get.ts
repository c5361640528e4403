import { loopTagSchema, loopWeekQuerySchema } from '../../../../shared/schemas/loops'
import { readLoop } from '../../../services/loops/readLoop'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  const { week } = await readInput(event, loopWeekQuerySchema, 'query')
  return readLoop(database(), tag, week, new Date())
})
