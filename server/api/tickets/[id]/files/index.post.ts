import { z } from 'zod'
import { fileKeySchema, ticketIdSchema } from '../../../../../shared/schemas/tickets'
import { addFile, FILE_LIMIT_BYTES } from '../../../../services/tickets/files'

const query = z.object({ name: z.string().trim().min(1).max(300), at: z.iso.datetime().optional() })

/** The body is the file as it is; `Idempotency-Key` is respected. */
export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'technician')
  const { id } = await readInput(event, ticketIdSchema, 'params')
  const { name, at } = await readInput(event, query, 'query')
  if (Number(getHeader(event, 'content-length') ?? 0) > FILE_LIMIT_BYTES) throw refusal(413, 'too_large', 'A file may have at most 15 MB.')
  const key = fileKeySchema.safeParse(getHeader(event, 'idempotency-key'))
  const answer = await addFile(database(), fileStorage(), caller, id, event.node.req, { name, idempotencyKey: key.success ? key.data ?? null : null, at: at ? new Date(at) : undefined })
  setResponseStatus(event, answer.added ? 201 : 200)
  return answer
})
