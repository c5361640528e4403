import { digestOverview } from '../../services/digest/subscriptions'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  return digestOverview(database())
})
