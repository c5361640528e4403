import { accountSchema } from '../../../shared/schemas/people'
import { changeAccount } from '../../services/people/account'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  return await changeAccount(database(), userId!, await readInput(event, accountSchema))
})
