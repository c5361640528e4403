import { loopTagSchema } from '../../../../shared/schemas/loops'
import { endSetAside } from '../../../services/loops/setAside'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  await endSetAside(database(), caller, tag)
  setResponseStatus(event, 204)
  return null
})
