import { readBenefit } from '../../services/tickets/benefit'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  return readBenefit(database())
})
