import { z } from 'zod'
import { loopTagSchema } from '../../../../shared/schemas/loops'
import { loopTrend } from '../../../services/loops/loopTrend'

const at = z.string().transform((text, ctx) => {
  const date = new Date(/^\d{9,14}$/.test(text) ? Number(text) : text)
  if (!Number.isNaN(date.getTime())) return date
  ctx.addIssue({ code: 'custom', message: 'must be an ISO 8601 time, such as 2026-11-23T06:00:00Z' })
  return z.NEVER
})
const querySchema = z.object({ from: at.optional(), to: at.optional(), points: z.coerce.number().int().min(10).max(2000).default(1500) })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  return loopTrend(database(), tag, await readInput(event, querySchema, 'query'))
})
