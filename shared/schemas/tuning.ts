import { z } from 'zod'
import { weekSchema } from './fleet'

const positive = z.number().positive().finite()
const notNegative = z.number().min(0).finite()
const nonZero = z.number().finite().refine(v => v !== 0, 'must not be 0')

/** Gains in % of PV span per % of OP span (per second for an integrator), times in s. */
export const processModelSchema = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('fopdt'), processGain: nonZero, timeConstant: positive, deadTime: notNegative }),
  z.object({ kind: z.literal('sopdt'), processGain: nonZero, timeConstant: positive, timeConstant2: positive, deadTime: notNegative }),
  z.object({ kind: z.literal('integrating'), processGain: nonZero, deadTime: notNegative }),
])

export const findModelSchema = z.object({
  fromWeek: weekSchema, toWeek: weekSchema,
  /** the stretches to fit together, by begin and end; left out: those that carry a model on their own */
  stretches: z.array(z.object({ fromMs: z.number().int(), toMs: z.number().int() })).min(1, 'choose at least one stretch').max(12).optional(),
}).refine(r => r.fromWeek <= r.toWeek, { path: ['toWeek'], message: 'must not be before the first week' })
export type FindModelInput = z.output<typeof findModelSchema>

export const displayedControllerSchema = z.object({
  form: z.enum(['ideal', 'series', 'parallel']), action: z.enum(['direct', 'reverse']),
  gain: positive, gainUnit: z.enum(['gain', 'proportionalBand']),
  integral: notNegative.nullable(), derivative: notNegative.nullable(), timeUnit: z.enum(['s', 'min', 'repeatsPerMin']),
  setpointWeight: z.number().min(0).max(1).optional(), derivativeFilterFactor: z.number().min(1).max(100).optional(), measurementFilterTime: notNegative.optional(),
})

export const makeSheetSchema = z.object({
  /** of the loop's set-up that the person saw: the tuning as found must be the one they compared with */
  version: z.number().int().positive(),
  week: weekSchema.nullish(),
  proposed: displayedControllerSchema,
  setpointFilterTimeS: notNegative.default(0),
  rule: z.string().trim().min(1).max(100),
  ruleSource: z.string().trim().max(400).nullish(),
  /** false: the rule is used outside the processes that it was made for */
  withinDomain: z.boolean().optional(),
  model: z.object({ origin: z.enum(['data', 'typedIn']), process: processModelSchema, fitPercent: z.number().nullish(), note: z.string().trim().max(500).default('') }),
  noise: z.object({ standardDeviation: notNegative, intervalS: positive }).nullish(),
  reasons: z.string().trim().min(3, 'say why').max(2000),
  stopCriteria: z.array(z.string().trim().min(1).max(300)).min(1, 'name at least one condition for stopping').max(8),
  wayBack: z.string().trim().min(3, 'say how to go back').max(1000),
  changeNumber: z.string().trim().max(100).nullish(),
  ticketId: z.number().int().positive().nullish(),
})
export type MakeSheetInput = z.output<typeof makeSheetSchema>

export const sheetIdSchema = z.object({ id: z.coerce.number().int().positive() })
