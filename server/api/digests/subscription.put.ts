import { randomBytes } from 'node:crypto'
import { z } from 'zod'
import { saveSubscription } from '../../../db/repositories/digests'

const body = z.object({ active: z.boolean(), areaIds: z.array(z.number().int().positive()).max(500) })

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  const input = await readInput(event, body)
  await saveSubscription(database(), { userId: userId!, ...input, token: randomBytes(9).toString('base64url') })
  return input
})
