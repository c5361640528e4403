import { z } from 'zod'
import { isZone } from './scan/zoneClock'

const signal = z.object({ tag: z.string().trim().min(1).max(80), signal: z.enum(['pv', 'sp', 'op', 'mode']) })
const timezone = z.string().refine(isZone, 'must be a time zone of the IANA list, such as Europe/London')
const type = z.enum(['flow', 'pressure', 'level', 'temperature', 'analysis', 'other'])
const dateOrder = z.enum(['yearFirst', 'dayFirst', 'monthFirst'])

/** Query of an upload. */
export const importQuerySchema = z.object({
  name: z.string().trim().max(200).optional(),
  layout: z.enum(['wide', 'long']).optional(),
  timezone: timezone.optional(),
  unknown: z.enum(['create', 'skip', 'ask']).optional(),
  dateOrder: dateOrder.optional(),
})

/** The answer to the mapping step. */
export const mappingAnswerSchema = z.strictObject({
  dateOrder: dateOrder.optional(),
  timezone: timezone.optional(),
  layout: z.enum(['wide', 'long']).optional(),
  /** what becomes of unknown loops that `loops` does not name */
  unknown: z.enum(['create', 'skip', 'ask']).optional(),
  loops: z.array(z.object({ tag: z.string().max(200), action: z.enum(['create', 'skip']), type: type.optional(), description: z.string().max(500).optional() })).max(20_000).optional(),
  columns: z.record(z.string(), signal.nullable()).optional(),
})

export type ImportOptions = Omit<z.output<typeof importQuerySchema>, 'name'> & Partial<z.output<typeof mappingAnswerSchema>>
