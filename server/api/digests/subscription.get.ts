import { readSubscription } from '../../services/digest/subscriptions'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  return readSubscription(database(), userId!)
})
