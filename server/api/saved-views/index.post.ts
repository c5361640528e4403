import { savedViewSchema } from '../../../shared/schemas/fleet'
import { addView } from '../../services/fleet/savedViews'

export default defineEventHandler(async (event) => {
  const { userId, role } = await requireRole(event, 'viewer')
  const view = await readInput(event, savedViewSchema)
  return { views: await addView(database(), { userId: userId!, role }, view) }
})
