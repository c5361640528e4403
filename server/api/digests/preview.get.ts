import { z } from 'zod'
import { weekSchema } from '../../../shared/schemas/tickets'
import { previewDigest } from '../../services/digest/previewDigest'

const query = z.object({ week: weekSchema, areas: z.string().regex(/^\d+(,\d+)*$/).optional() })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  const { week, areas } = await readInput(event, query, 'query')
  return previewDigest(database(), { week, areaIds: areas?.split(',').map(Number) ?? [], publicUrl: environment().PUBLIC_URL, now: new Date() })
})
