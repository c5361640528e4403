import { z } from 'zod'
import { fleetQuerySchema } from '../../../shared/schemas/fleet'
import { plantWeek } from '../../services/plant/plantWeek'

const query = z.object({ week: fleetQuerySchema.shape.week })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { week } = await readInput(event, query, 'query')
  return plantWeek(database(), week, new Date())
})
