import { idSchema, outageSchema } from '../../../shared/schemas/people'
import { changeOutage } from '../../services/outages'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'engineer')
  const { id } = await readInput(event, idSchema, 'params')
  await changeOutage(database(), id, await readInput(event, outageSchema), by)
  return { changed: true }
})
