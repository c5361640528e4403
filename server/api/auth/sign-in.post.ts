import { getHeader } from 'h3'
import { signInSchema } from '../../../shared/schemas/people'
import { checkSignIn } from '../../services/people/checkSignIn'

export default defineEventHandler(async (event) => {
  const input = await readInput(event, signInSchema)
  const person = await checkSignIn(database(), { ...input, networkAddress: networkAddress(event), demo: environment().DEMO === 'on' })
  await signInAs(event, person.id, getHeader(event, 'user-agent'))
  return { person }
})
