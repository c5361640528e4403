import { z } from 'zod'
import { previousWeek } from '../assessment/week/isoWeek'
import { LEDGER_STATES, VERDICTS } from '../assessment/types'
import { FLEET_SORT_KEYS } from '../types/fleet'

/** An ISO week that there is: most years have no week 53. */
export const weekSchema = z.string().refine((text) => {
  try { return Boolean(previousWeek(text)) }
  catch { return false }
}, 'must be an ISO week such as 2026-W48')

/** One value, several by comma, or the key given several times; '' counts as not given. */
const several = <O>(item: z.ZodType<O, string>) => z.union([z.string(), z.array(z.string())]).optional()
  .transform(given => (given === undefined ? [] : Array.isArray(given) ? given : [given]).flatMap(text => text.split(',')).map(text => text.trim()).filter(Boolean))
  .pipe(z.array(item))

/** Names of areas may hold a comma, so several of them are several keys. */
const names = z.union([z.string(), z.array(z.string())]).optional()
  .transform(given => (given === undefined ? [] : Array.isArray(given) ? given : [given]).filter(Boolean))

const sortKeys: ReadonlySet<string> = new Set([...FLEET_SORT_KEYS, ...LEDGER_STATES.map(state => `hours.${state}`)])
const sortItem = z.string().refine(text => sortKeys.has(text.replace(/^-/, '')), { error: issue => `"${String(issue.input).slice(0, 40)}" is nothing to sort by` })

export const fleetQuerySchema = z.object({
  week: z.string().optional().transform(text => text || undefined).pipe(weekSchema.optional()),
  sort: several(sortItem),
  area: names,
  type: several(z.enum(['flow', 'pressure', 'level', 'temperature', 'analysis', 'other'])),
  state: several(z.enum(LEDGER_STATES)),
  verdict: several(z.enum(VERDICTS)),
  priority: several(z.enum(['1', '2', '3']).transform(Number)),
  group: several(z.string().max(4)),
  search: z.string().trim().max(100).optional(),
  /** loops that lost more than so many hours */
  lostOver: z.coerce.number().min(0).max(169).optional(),
  ticket: z.enum(['', 'with', 'without']).optional(),
  setAside: z.enum(['last', 'include', 'only', 'exclude']).default('last'),
  limit: z.coerce.number().int().min(1).max(20_000).optional(),
  offset: z.coerce.number().int().min(0).default(0),
  format: z.enum(['json', 'csv']).default('json'),
  columns: several(z.string().max(40)),
})
export type FleetQuery = z.output<typeof fleetQuerySchema>

export const savedViewSchema = z.object({
  name: z.string().trim().min(1, 'needs a name').max(60, 'has at most 60 characters'),
  query: z.string().max(2000),
  shared: z.boolean().default(false),
})
export const savedViewChangeSchema = z.object({ name: savedViewSchema.shape.name, query: savedViewSchema.shape.query, shared: z.boolean() }).partial()
