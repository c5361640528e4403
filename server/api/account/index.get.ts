import { readAccount } from '../../services/people/account'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  return await readAccount(database(), userId!)
})
