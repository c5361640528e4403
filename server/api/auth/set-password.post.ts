import { getHeader } from 'h3'
import { setPasswordSchema } from '../../../shared/schemas/people'
import { setPasswordByLink } from '../../services/people/setPassword'

export default defineEventHandler(async (event) => {
  const userId = await setPasswordByLink(database(), await readInput(event, setPasswordSchema))
  await signInAs(event, userId, getHeader(event, 'user-agent'))
  return { signedIn: true }
})
