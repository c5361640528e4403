import { z } from 'zod'
import { ROLES } from '../types/people'

/**
 * Length decides, not a mix of character kinds (NIST SP 800-63B-4, 3.1.1.2: at least 15 characters where the password
 * stands alone is asked of new systems; 12 here is the floor of OWASP ASVS 5.0 for systems with a limit on attempts).
 */
export const passwordSchema = z.string().min(12, 'must have at least 12 characters').max(200, 'may have at most 200 characters')

const email = z.email('is not an e-mail address').max(254).transform(text => text.trim())
const name = z.string().trim().min(1, 'may not be empty').max(80)

export const signInSchema = z.object({ email: z.string().trim().min(1, 'may not be empty').max(254), password: z.string().min(1, 'may not be empty').max(200) })
export const resetRequestSchema = z.object({ email })
export const linkSchema = z.object({ token: z.string().min(20).max(100) })
export const setPasswordSchema = z.object({ token: z.string().min(20).max(100), password: passwordSchema })
export const changePasswordSchema = z.object({ current: z.string().min(1, 'may not be empty').max(200), password: passwordSchema })
export const accountSchema = z.object({ name: name.optional(), notify: z.object({ assignment: z.boolean(), handBack: z.boolean(), overdue: z.boolean() }).optional() })
export const inviteSchema = z.object({ email, name, role: z.enum(ROLES) })
export const changePersonSchema = z.object({ name: name.optional(), role: z.enum(ROLES).optional(), disabled: z.boolean().optional() })
export const newTokenSchema = z.object({ name, scopes: z.array(z.enum(['read', 'import'])).min(1, 'needs at least one scope').transform(scopes => [...new Set(scopes)]) })
export const idSchema = z.object({ id: z.coerce.number().int().positive() })

export const outageSchema = z.object({
  areaId: z.number().int().positive().nullable(),
  from: z.iso.datetime({ offset: true }).transform(text => new Date(text)),
  to: z.iso.datetime({ offset: true }).transform(text => new Date(text)),
  reason: z.string().trim().max(500).default(''),
}).refine(o => o.to > o.from, { path: ['to'], message: 'must be after the begin' })
