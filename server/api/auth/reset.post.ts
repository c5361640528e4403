import { resetRequestSchema } from '../../../shared/schemas/people'
import { requestReset } from '../../services/people/requestReset'

/** The same answer whether or not the address has an account. */
export default defineEventHandler(async (event) => {
  const { email } = await readInput(event, resetRequestSchema)
  await requestReset(database(), { email, networkAddress: networkAddress(event), publicUrl: environment().PUBLIC_URL, demo: environment().DEMO === 'on' })
  return { message: 'If this address has an account, a mail with a link is on its way.' }
})
