import { z } from 'zod'
import { weekFrame } from '../assessment/week/isoWeek'
import { OUTCOMES, TICKET_STATES } from '../types/tickets'

const priority = z.union([z.literal(1), z.literal(2), z.literal(3)])
const day = z.iso.date()
/** 2026-W54 is none. */
export const weekSchema = z.string().refine((text) => {
  try { return Boolean(weekFrame(text, 'UTC')) }
  catch { return false }
}, 'must be an ISO week such as 2026-W48')

export const openTicketSchema = z.object({
  tags: z.array(z.string().min(1)).min(1, 'name at least one loop').max(200),
  week: weekSchema.optional(),
  title: z.string().trim().max(200).optional(),
  priority: priority.optional(),
  dueOn: day.nullish(),
  assigneeId: z.number().int().positive().nullish(),
  groupId: z.number().int().positive().nullish(),
  note: z.string().trim().max(4000).optional(),
})

export const changeTicketSchema = z.object({
  version: z.number().int().positive(),
  state: z.enum(TICKET_STATES).exclude(['closed']).optional(),
  assigneeId: z.number().int().positive().nullable().optional(),
  title: z.string().trim().min(1).max(200).optional(),
  priority: priority.optional(),
  dueOn: day.nullable().optional(),
  watching: z.boolean().optional(),
  reason: z.string().trim().max(2000).optional(),
  workDoneAt: z.iso.datetime().optional(),
  at: z.iso.datetime().optional(),
})

const idempotencyKey = z.string().min(8).max(100).optional()
const cell = z.union([z.string().max(2000), z.number(), z.null()])

export const commentSchema = z.object({ text: z.string().trim().min(1, 'write something').max(4000), idempotencyKey, at: z.iso.datetime().optional() })
export const entrySchema = z.object({
  idempotencyKey,
  at: z.iso.datetime().optional(),
  entry: z.discriminatedUnion('kind', [
    z.object({ kind: z.literal('comment'), text: z.string().trim().min(1).max(4000) }),
    z.object({ kind: z.literal('check'), checkId: z.string().min(1).max(60), tag: z.string().min(1).max(200).optional(), values: z.record(z.string(), cell), replaces: z.string().nullish() }),
    z.object({ kind: z.literal('tuning'), tag: z.string().min(1), stage: z.enum(['asFound', 'asLeft']), tuning: z.record(z.string(), cell), reason: z.string().trim().min(1, 'say why').max(2000), changeNumber: z.string().trim().max(100).nullish() }),
  ]),
})

export const proofQuerySchema = z.object({
  beforeFrom: z.iso.datetime().optional(), beforeTo: z.iso.datetime().optional(),
  afterFrom: z.iso.datetime().optional(), afterTo: z.iso.datetime().optional(),
})

export const closeTicketSchema = z.object({ outcome: z.enum(OUTCOMES), reason: z.string().trim().max(2000).optional(), version: z.number().int().positive().optional(), windows: proofQuerySchema.optional() })

export const listTicketsSchema = z.object({
  state: z.string().optional().transform(value => value?.split(',').filter(s => (TICKET_STATES as readonly string[]).includes(s)) as (typeof TICKET_STATES[number])[] | undefined),
  assignee: z.union([z.literal('me'), z.coerce.number().int().positive()]).optional(),
  loop: z.string().optional(),
  area: z.string().optional(),
  due: z.enum(['overdue', 'week']).optional(),
  search: z.string().trim().optional(),
  limit: z.coerce.number().int().min(1).max(1000).optional(),
  offset: z.coerce.number().int().min(0).optional(),
})

export const ticketIdSchema = z.object({ id: z.coerce.number().int().positive() })

export const ticketFileSchema = ticketIdSchema.extend({ fileId: z.coerce.number().int().positive() })
export const fileKeySchema = idempotencyKey
