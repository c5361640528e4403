import { z } from 'zod'
import { listMails } from '../../../db/repositories/mails'

const schema = z.object({ status: z.enum(['waiting', 'sending', 'sent', 'failed']).optional() })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  return await listMails(database(), await readInput(event, schema, 'query'))
})
