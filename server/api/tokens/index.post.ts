import { setResponseStatus } from 'h3'
import { newTokenSchema } from '../../../shared/schemas/people'
import { makeToken } from '../../services/tokens'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  const made = await makeToken(database(), await readInput(event, newTokenSchema), by)
  setResponseStatus(event, 201)
  return made
})
