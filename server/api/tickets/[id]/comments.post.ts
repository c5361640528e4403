import { commentSchema, ticketIdSchema } from '../../../../shared/schemas/tickets'
import { addEntry } from '../../../services/tickets/addEntry'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'viewer')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  const { text, idempotencyKey, at } = await readInput(event, commentSchema)
  const added = await addEntry(database(), caller, id, { entry: { kind: 'comment', text }, idempotencyKey: idempotencyKey ?? null, at: at ? new Date(at) : undefined })
  setResponseStatus(event, added ? 201 : 200)
  return { added }
})
