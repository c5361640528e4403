import { z } from 'zod'
import { weekSchema } from './fleet'

export const loopTagSchema = z.object({ tag: z.string().min(1).max(120) })
export const loopWeekQuerySchema = z.object({ week: weekSchema.optional() })

const positive = z.number().positive()
/** What an engineer may change about a loop. null: not said, the default of the type holds. */
export const loopChangeSchema = z.object({
  description: z.string().trim().max(300),
  area: z.string().trim().max(100).nullable(),
  unit: z.string().trim().max(100),
  type: z.enum(['flow', 'pressure', 'level', 'temperature', 'analysis', 'other']),
  pvLow: z.number().nullable(), pvHigh: z.number().nullable(), pvUnit: z.string().trim().max(20),
  opLow: z.number(), opHigh: z.number(),
  normalModes: z.array(z.string().trim().toUpperCase().min(1).max(20)).min(1).max(10),
  tolerance: positive.nullable(), priority: z.union([z.literal(1), z.literal(2), z.literal(3)]),
  deadTimeS: z.number().min(0).nullable(), intervalS: positive.nullable(), settlingS: positive.nullable(),
  form: z.enum(['ideal', 'series', 'parallel', 'onOff']), action: z.enum(['direct', 'reverse']),
  gain: positive.nullable(), gainUnit: z.enum(['gain', 'proportionalBand']),
  integralTime: positive.nullable(), derivativeTime: z.number().min(0).nullable(), timeUnit: z.enum(['s', 'min', 'repeatsPerMin']),
  filterTimeS: z.number().min(0).nullable(), setpointWeight: z.number().min(0).max(1).nullable(), hysteresis: z.number().min(0).nullable(),
  upstream: z.array(z.string().min(1)).max(50),
  /** the version that the person saw */
  version: z.number().int().positive(),
}).partial()
  .refine(c => c.pvLow === undefined || c.pvHigh === undefined || c.pvLow === null || c.pvHigh === null || c.pvLow < c.pvHigh, { path: ['pvHigh'], message: 'must be above the low end of the range' })
  .refine(c => c.opLow === undefined || c.opHigh === undefined || c.opLow < c.opHigh, { path: ['opHigh'], message: 'must be above the low end of the output' })
export type LoopChange = z.output<typeof loopChangeSchema>

export const setAsideSchema = z.object({ week: weekSchema, reason: z.string().trim().min(3, 'say why this is not a problem').max(1000), untilAt: z.iso.datetime() })
export const shelveSchema = z.object({ reason: z.string().trim().min(3, 'say why').max(1000), untilAt: z.iso.datetime() })
export const concernSchema = z.object({ text: z.string().trim().min(3, 'say what you saw').max(2000) })
