import { linkSchema } from '../../../shared/schemas/people'
import { readLink } from '../../services/people/setPassword'

/** Whom a one-time link belongs to. The token comes in the body, so that it stays out of access logs. */
export default defineEventHandler(async (event) => {
  const { token } = await readInput(event, linkSchema)
  return await readLink(database(), token)
})
