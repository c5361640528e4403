import { openTicketSchema } from '../../../shared/schemas/tickets'
import { openTicket } from '../../services/tickets/openTicket'
import { readTicket } from '../../services/tickets/readTicket'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const input = await readInput(event, openTicketSchema)
  const id = await openTicket(database(), caller, input)
  setResponseStatus(event, 201)
  return readTicket(database(), caller, id)
})
