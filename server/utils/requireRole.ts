import type { H3Event } from 'h3'
import { getHeader } from 'h3'
import { atLeast, type Caller, type Role } from '../../shared/types/people'
import { personOfToken, type TokenScope } from '../services/tokens'
import { personOfSession } from './session'
import { refusal } from './refusal'

/**
 * Who calls, or a refusal: 401 when nobody, 403 when the role (or the token's scope) does not reach.
 * `scope` names what a machine token must carry; without it the route is for people only.
 */
export async function requireRole(event: H3Event, role: Role, scope?: TokenScope): Promise<Caller> {
  const authorization = getHeader(event, 'authorization')
  if (authorization?.startsWith('Bearer ')) {
    const token = await personOfToken(database(), authorization.slice(7).trim())
    if (!token) throw refusal(401, 'not_signed_in', 'This access token is not known or was revoked.')
    if (!scope || !token.scopes.includes(scope)) throw refusal(403, 'not_allowed', scope ? `This access token lacks the scope "${scope}".` : 'Access tokens cannot be used here; sign in as a person.')
    return { userId: null, tokenId: token.id, name: token.name, email: '', role: scope === 'import' ? 'engineer' : 'viewer' }
  }
  const person = await personOfSession(event)
  if (!person) throw refusal(401, 'not_signed_in', 'Please sign in.')
  if (!atLeast(person.role, role)) throw refusal(403, 'not_allowed', `This needs the role ${role} or higher; yours is ${person.role}.`)
  return { userId: person.id, tokenId: null, name: person.name, email: person.email, role: person.role }
}
