import type { H3Event } from 'h3'
import { getHeader, getQuery, getRouterParams } from 'h3'
import type { z } from 'zod'
import { refusal } from './refusal'

const BODY_LIMIT_BYTES = 1024 * 1024

/** Reads a JSON body with a hard cap; h3's own reader has none. */
async function readJson(event: H3Event): Promise<unknown> {
  const declared = Number(getHeader(event, 'content-length') ?? 0)
  const tooLarge = () => refusal(413, 'too_large', `The request is larger than ${BODY_LIMIT_BYTES / 1024} KiB.`)
  if (declared > BODY_LIMIT_BYTES) throw tooLarge()
  const chunks: Buffer[] = []
  let length = 0
  for await (const chunk of event.node.req) {
    length += (chunk as Buffer).length
    if (length > BODY_LIMIT_BYTES) throw tooLarge()
    chunks.push(chunk as Buffer)
  }
  if (length === 0) return {}
  try {
    return JSON.parse(Buffer.concat(chunks).toString('utf8'))
  }
  catch {
    throw refusal(422, 'invalid_input', 'The request body is not JSON.', { issues: [{ path: '', message: 'not JSON' }] })
  }
}

/** Query, path parameters or JSON body (which, by `from`) through a zod schema; bad input becomes 422 with its issues. */
export async function readInput<S extends z.ZodType>(event: H3Event, schema: S, from: 'body' | 'query' | 'params' = 'body'): Promise<z.output<S>> {
  const raw = from === 'body' ? await readJson(event) : from === 'query' ? getQuery(event) : decodeParams(getRouterParams(event))
  const result = schema.safeParse(raw)
  if (result.success) return result.data
  const issues = result.error.issues.map(issue => ({ path: issue.path.join('.'), message: issue.message }))
  const first = issues[0]
  throw refusal(422, 'invalid_input', first ? `${first.path ? `${first.path}: ` : ''}${first.message}` : 'The input is not valid.', { issues })
}

function decodeParams(params: Record<string, string>): Record<string, string> {
  return Object.fromEntries(Object.entries(params).map(([key, value]) => [key, decodeURIComponent(value)]))
}
