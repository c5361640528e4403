import { idSchema } from '../../../../shared/schemas/people'
import { readCaughtMail } from '../../../services/mail/readCaughtMail'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  const { id } = await readInput(event, idSchema, 'params')
  return await readCaughtMail(database(), id) ?? (() => { throw notFound('This mail') })()
})
