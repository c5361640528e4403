import type { H3Event } from 'h3'
import { clearUserSession, getUserSession, setUserSession } from '#imports'
import type { Person } from '../../shared/types/people'
import { beginSession, endSession, touchSession } from '../services/sessions'

/**
 * nuxt-auth-utils seals the cookie, but a sealed cookie alone cannot be revoked: it carries only a random id here,
 * and the row in `sessions` decides on every request.
 */
export async function personOfSession(event: H3Event): Promise<Person | null> {
  const cached = event.context.person as Person | null | undefined
  if (cached !== undefined) return cached
  const { secure } = await getUserSession(event) as { secure?: { sessionId?: string } }
  const person = secure?.sessionId ? await touchSession(database(), secure.sessionId) : null
  event.context.person = person
  return person
}

export async function signInAs(event: H3Event, userId: number, userAgent: string | undefined): Promise<void> {
  await clearUserSession(event)
  const sessionId = await beginSession(database(), userId, userAgent)
  await setUserSession(event, { secure: { sessionId } } as never)
}

export async function signOut(event: H3Event): Promise<void> {
  const { secure } = await getUserSession(event) as { secure?: { sessionId?: string } }
  if (secure?.sessionId) await endSession(database(), secure.sessionId)
  await clearUserSession(event)
}
