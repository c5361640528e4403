import { idSchema } from '../../../shared/schemas/people'
import { endToken } from '../../services/tokens'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  const { id } = await readInput(event, idSchema, 'params')
  await endToken(database(), id, by)
  return { revoked: true }
})
