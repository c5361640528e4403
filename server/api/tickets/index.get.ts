import { listTicketsSchema } from '../../../shared/schemas/tickets'
import { listTickets } from '../../services/tickets/listTickets'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer', 'read')
  const { state, assignee, loop, ...rest } = await readInput(event, listTicketsSchema, 'query')
  return listTickets(database(), { ...rest, states: state, loopTag: loop, assigneeId: assignee === 'me' ? caller.userId ?? -1 : assignee })
})
