import { loopTagSchema, setAsideSchema } from '../../../../shared/schemas/loops'
import { setAside } from '../../../services/loops/setAside'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  await setAside(database(), caller, tag, await readInput(event, setAsideSchema))
  setResponseStatus(event, 204)
  return null
})
