import { z } from 'zod'
import { weekSchema } from '../../../shared/schemas/tickets'
import { sendDigest } from '../../services/digest/sendDigest'

const body = z.object({ week: weekSchema })

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { week } = await readInput(event, body)
  const now = new Date()
  return sendDigest(database(), { week, dueAt: now, publicUrl: environment().PUBLIC_URL, now, by: caller })
})
