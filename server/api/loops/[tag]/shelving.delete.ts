import { loopTagSchema } from '../../../../shared/schemas/loops'
import { unshelve } from '../../../services/loops/setAside'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  await unshelve(database(), caller, tag)
  setResponseStatus(event, 204)
  return null
})
