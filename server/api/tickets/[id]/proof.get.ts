import { proofQuerySchema, ticketIdSchema } from '../../../../shared/schemas/tickets'
import { proveTicket } from '../../../services/tickets/proveTicket'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  return proveTicket(database(), id, await readInput(event, proofQuerySchema, 'query'))
})
