import { setResponseStatus } from 'h3'
import { inviteSchema } from '../../../shared/schemas/people'
import { invitePerson } from '../../services/people/invitePerson'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  const invited = await invitePerson(database(), await readInput(event, inviteSchema), { by, publicUrl: environment().PUBLIC_URL })
  setResponseStatus(event, 201)
  return invited
})
