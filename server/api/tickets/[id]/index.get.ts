import { ticketIdSchema } from '../../../../shared/schemas/tickets'
import { readTicket } from '../../../services/tickets/readTicket'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer', 'read')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  return readTicket(database(), caller, id)
})
