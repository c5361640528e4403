import { entrySchema, ticketIdSchema } from '../../../../shared/schemas/tickets'
import { addEntry } from '../../../services/tickets/addEntry'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  const { entry, idempotencyKey, at } = await readInput(event, entrySchema)
  const added = await addEntry(database(), caller, id, { entry, idempotencyKey: idempotencyKey ?? null, at: at ? new Date(at) : undefined })
  setResponseStatus(event, added ? 201 : 200)
  return { added }
})
