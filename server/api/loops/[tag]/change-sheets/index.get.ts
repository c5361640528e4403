import { loopTagSchema } from '../../../../../shared/schemas/loops'
import { listSheets } from '../../../../services/tuning/readSheets'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  return listSheets(database(), tag)
})
