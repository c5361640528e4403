import { changeTicketSchema, ticketIdSchema } from '../../../../shared/schemas/tickets'
import { changeTicket } from '../../../services/tickets/changeTicket'
import { readTicket } from '../../../services/tickets/readTicket'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  await changeTicket(database(), caller, id, await readInput(event, changeTicketSchema))
  return readTicket(database(), caller, id)
})
