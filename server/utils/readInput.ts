import type { H3Event } from 'h3'
import { getQuery, getRouterParams } from 'h3'
import type { z } from 'zod'
import { readBytes } from './readBytes'
import { notFound, refusal } from './refusal'

const BODY_LIMIT_BYTES = 1024 * 1024

/** Reads a JSON body with a hard cap; h3's own reader has none. */
async function readJson(event: H3Event): Promise<unknown> {
  const bytes = await readBytes(event, BODY_LIMIT_BYTES)
  if (bytes.length === 0) return {}
  try {
    return JSON.parse(bytes.toString('utf8'))
  }
  catch {
    throw refusal(422, 'invalid_input', 'The request body is not JSON.', { issues: [{ path: '', message: 'not JSON' }] })
  }
}

/** Text that no database takes: the character NUL, or half of a surrogate pair. */
function isUnstorable(value: unknown): boolean {
  if (typeof value === 'string') return value.includes('\0') || !value.isWellFormed()
  return typeof value === 'object' && value !== null && Object.entries(value).some(([key, item]) => isUnstorable(key) || isUnstorable(item))
}

/** Query, path parameters or JSON body (which, by `from`) through a zod schema; bad input becomes 422 with its issues. */
export async function readInput<S extends z.ZodType>(event: H3Event, schema: S, from: 'body' | 'query' | 'params' = 'body'): Promise<z.output<S>> {
  const raw = from === 'body' ? await readJson(event) : from === 'query' ? getQuery(event) : decodeParams(getRouterParams(event))
  if (isUnstorable(raw)) throw refusal(422, 'invalid_input', 'The text holds characters that cannot be stored.', { issues: [{ path: '', message: 'characters that cannot be stored' }] })
  const result = schema.safeParse(raw)
  if (result.success) return result.data
  const issues = result.error.issues.map(issue => ({ path: issue.path.join('.'), message: issue.message }))
  const first = issues[0]
  throw refusal(422, 'invalid_input', first ? `${first.path ? `${first.path}: ` : ''}${first.message}` : 'The input is not valid.', { issues })
}

function decodeParams(params: Record<string, string>): Record<string, string> {
  try { return Object.fromEntries(Object.entries(params).map(([key, value]) => [key, decodeURIComponent(value)])) }
  catch { throw notFound('This address') }
}
