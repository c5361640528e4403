import { z } from 'zod'
import { removeView } from '../../services/fleet/savedViews'

export default defineEventHandler(async (event) => {
  const { userId, role } = await requireRole(event, 'viewer')
  const { id } = await readInput(event, z.object({ id: z.coerce.number().int().positive() }), 'params')
  return { views: await removeView(database(), { userId: userId!, role }, id) }
})
