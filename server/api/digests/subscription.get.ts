import { findSubscription } from '../../../db/repositories/digests'

export default defineEventHandler(async (event) => {
  const { userId } = await requireRole(event, 'viewer')
  return (await findSubscription(database(), userId!)) ?? { active: false, areaIds: [] }
})
