import { concernSchema, loopTagSchema } from '../../../../shared/schemas/loops'
import { raiseConcern } from '../../../services/loops/setAside'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  await raiseConcern(database(), caller, tag, (await readInput(event, concernSchema)).text)
  setResponseStatus(event, 204)
  return null
})
