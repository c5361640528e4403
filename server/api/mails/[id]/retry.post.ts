import { retryFailedMail } from '../../../../db/repositories/mails'
import { idSchema } from '../../../../shared/schemas/people'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  const { id } = await readInput(event, idSchema, 'params')
  if (!await retryFailedMail(database(), id)) throw notFound('A failed mail of this number')
  return { queued: true }
})
