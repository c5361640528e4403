import { listTokens } from '../../../db/repositories/tokens'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'admin')
  return await listTokens(database())
})
