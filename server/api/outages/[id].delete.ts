import { idSchema } from '../../../shared/schemas/people'
import { removeOutage } from '../../services/outages'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'engineer')
  const { id } = await readInput(event, idSchema, 'params')
  await removeOutage(database(), id, by)
  return { deleted: true }
})
