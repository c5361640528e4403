import type { H3Error, H3Event } from 'h3'
import { send, setResponseHeader, setResponseStatus } from 'h3'

const words: Record<number, string> = { 400: 'Bad Request', 401: 'Unauthorized', 403: 'Forbidden', 404: 'Not Found', 405: 'Method Not Allowed', 409: 'Conflict', 412: 'Precondition Failed', 413: 'Content Too Large', 415: 'Unsupported Media Type', 422: 'Unprocessable Content', 423: 'Locked', 429: 'Too Many Requests', 500: 'Internal Server Error', 503: 'Service Unavailable' }

/** PostgreSQL is away: refused connections, its own shut-down and start-up codes, an exhausted pool. */
function isDatabaseAway(error: { code?: string, name?: string } | undefined): boolean {
  return Boolean(error && (['ECONNREFUSED', 'ECONNRESET', '57P01', '57P02', '57P03', '53300'].includes(error.code ?? '') || error.name === 'KnexTimeoutError'))
}

/** One body for every error: `{statusCode, statusMessage, message, data?}`. No stack, SQL or library object leaves the server. */
export default async function errorHandler(error: H3Error, event: H3Event): Promise<void> {
  const cause = (error.cause ?? error) as { statusCode?: number, data?: { code?: string }, message?: string, name?: string, code?: string }
  const isRefusal = cause.name === 'Refusal' || (!error.unhandled && typeof error.statusCode === 'number' && error.statusCode < 500) || Boolean((error.data as { code?: string } | undefined)?.code)
  const away = isDatabaseAway(cause)
  const statusCode = away ? 503 : isRefusal ? (cause.name === 'Refusal' ? cause.statusCode! : error.statusCode) : 500
  if (statusCode === 500) console.error(`${event.method} ${event.path}:`, error.cause ?? error)
  const data = away ? { code: 'database_away' } : isRefusal ? (cause.name === 'Refusal' ? cause.data : error.data) : { code: 'server_error' }
  const message = away ? 'The database cannot be reached just now. Please try again in a moment.' : isRefusal ? (cause.name === 'Refusal' ? cause.message! : error.message) : 'Something went wrong on the server. It was written to the log.'
  const retryAfter = away ? 5 : (data as { retryAfter?: number } | undefined)?.retryAfter
  if (retryAfter !== undefined) setResponseHeader(event, 'Retry-After', retryAfter)
  setResponseStatus(event, statusCode)
  setResponseHeader(event, 'Content-Type', 'application/json')
  await send(event, JSON.stringify({ statusCode, statusMessage: words[statusCode] ?? 'Error', message, ...(data ? { data } : {}) }))
}
