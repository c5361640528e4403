import { getHeader } from 'h3'
import { changePasswordSchema } from '../../../shared/schemas/people'
import { changePassword } from '../../services/people/setPassword'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  await changePassword(database(), { userId: userId!, ...await readInput(event, changePasswordSchema) })
  await signInAs(event, userId!, getHeader(event, 'user-agent'))
  return { changed: true }
})
