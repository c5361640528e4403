import { z } from 'zod'

const zone = z.string().refine((name) => {
  try { return Boolean(new Intl.DateTimeFormat('en', { timeZone: name })) }
  catch { return false }
}, 'must be a time zone of the IANA list, such as Europe/London')

const byType = (unit: z.ZodType<number>) => z.strictObject({ flow: unit, pressure: unit, level: unit, temperature: unit, analysis: unit, other: unit })

/**
 * Settings of a site with their defaults. Tolerances (% of span) and settling horizons (s) are our own defaults by loop
 * type; a loop's own set-up goes before them.
 */
export const settingsSchema = z.object({
  siteName: z.string().trim().min(1, 'may not be empty').max(80).default('Our plant'),
  zone: zone.default('Europe/London'),
  digestWeekday: z.number().int().min(1).max(7).default(1),
  digestHour: z.number().int().min(0).max(23).default(6),
  changeNumberRequired: z.boolean().default(false),
  toleranceByType: byType(z.number().positive().max(100)).default({ flow: 1, pressure: 1, level: 3, temperature: 2, analysis: 3, other: 2 }),
  settlingByType: byType(z.number().positive().max(7 * 86_400)).default({ flow: 30, pressure: 120, level: 600, temperature: 1800, analysis: 3600, other: 600 }),
  trendRetentionDays: z.number().int().min(14).max(7300).nullable().default(null),
  uploadRetentionDays: z.number().int().min(1).max(7300).default(30),
  mailRetentionDays: z.number().int().min(1).max(3650).default(90),
})

export type SiteSettings = z.output<typeof settingsSchema>

export const settingsChangeSchema = settingsSchema.partial()
