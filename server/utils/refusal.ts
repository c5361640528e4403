import { createError } from 'h3'

export interface InputIssue { path: string, message: string }

const statusMessages: Record<number, string> = {
  400: 'Bad Request', 401: 'Unauthorized', 403: 'Forbidden', 404: 'Not Found', 409: 'Conflict', 413: 'Content Too Large',
  415: 'Unsupported Media Type', 422: 'Unprocessable Content', 429: 'Too Many Requests', 503: 'Service Unavailable',
}

/** The one error body: a sentence for a person in `message`, a word for the client in `data.code`. */
export function refusal(statusCode: number, code: string, message: string, data: Record<string, unknown> = {}) {
  return createError({ statusCode, statusMessage: statusMessages[statusCode] ?? 'Error', message, data: { code, ...data } })
}

export const notFound = (what: string) => refusal(404, 'not_found', `${what} was not found, or is not yours to see.`)
