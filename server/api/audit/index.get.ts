import { z } from 'zod'
import { listAudit } from '../../../db/repositories/audit'

const schema = z.object({ limit: z.coerce.number().int().min(1).max(500).default(100), before: z.coerce.number().int().positive().optional(), entity: z.string().max(40).optional() })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  return await listAudit(database(), await readInput(event, schema, 'query'))
})
