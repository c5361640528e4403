import { listUsers } from '../../../db/repositories/users'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  return await listUsers(database())
})
