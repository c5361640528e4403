import type { H3Event } from 'h3'
import { getHeader } from 'h3'
import { environment } from './environment'

/**
 * The network address that a request came from, for the limits of sign-in. Behind a reverse proxy that is the last word
 * of X-Forwarded-For; the words before it are the caller's own and may be invented to escape the limits.
 */
export function networkAddress(event: H3Event): string {
  const forwarded = environment().TRUST_PROXY === 'on' ? getHeader(event, 'x-forwarded-for')?.split(',').at(-1)?.trim() : undefined
  return forwarded || event.node.req.socket.remoteAddress || ''
}
