import { closeTicketSchema, ticketIdSchema } from '../../../../shared/schemas/tickets'
import { closeTicket } from '../../../services/tickets/closeTicket'
import { readTicket } from '../../../services/tickets/readTicket'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  await closeTicket(database(), caller, id, await readInput(event, closeTicketSchema))
  return readTicket(database(), caller, id)
})
