import { loopTagSchema, shelveSchema } from '../../../../shared/schemas/loops'
import { shelve } from '../../../services/loops/setAside'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  await shelve(database(), caller, tag, await readInput(event, shelveSchema))
  setResponseStatus(event, 204)
  return null
})
