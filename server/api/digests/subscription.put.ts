import { z } from 'zod'
import { changeSubscription } from '../../services/digest/subscriptions'

const body = z.object({ active: z.boolean(), areaIds: z.array(z.number().int().positive()).max(500) })

export default defineEventHandler(async (event) => {
  const { userId, name } = await requireRole(event, 'viewer')
  return changeSubscription(database(), { userId: userId!, name }, await readInput(event, body))
})
