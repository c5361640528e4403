import { idSchema } from '../../../../shared/schemas/people'
import { inviteAgain } from '../../../services/people/invitePerson'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  const { id } = await readInput(event, idSchema, 'params')
  await inviteAgain(database(), id, { by, publicUrl: environment().PUBLIC_URL })
  return { invited: true }
})
