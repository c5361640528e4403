import { z } from 'zod'
import { savedViewChangeSchema } from '../../../shared/schemas/fleet'
import { changeView } from '../../services/fleet/savedViews'

export default defineEventHandler(async (event) => {
  const { userId, role } = await requireRole(event, 'viewer')
  const { id } = await readInput(event, z.object({ id: z.coerce.number().int().positive() }), 'params')
  const change = await readInput(event, savedViewChangeSchema)
  return { views: await changeView(database(), { userId: userId!, role }, id, change) }
})
