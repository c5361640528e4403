import type { H3Event } from 'h3'
import { getCookie } from 'h3'
import type { Person } from '../../shared/types/people'
import { beginSession, endSession, touchSession } from '../services/sessions'
import { environment } from './environment'

const COOKIE = 'fettle-session'

/** The id that the sealed cookie carries. Asking the library only when there is a cookie, because it would set one for anybody. */
async function sessionId(event: H3Event): Promise<string | undefined> {
  if (!getCookie(event, COOKIE)) return undefined
  return (await getUserSession(event) as { secure?: { sessionId?: string } }).secure?.sessionId
}

/**
 * nuxt-auth-utils seals the cookie, but a sealed cookie alone cannot be revoked: it carries only a random id here,
 * and the row in `sessions` decides on every request.
 */
export async function personOfSession(event: H3Event): Promise<Person | null> {
  const cached = event.context.person as Person | null | undefined
  if (cached !== undefined) return cached
  const id = await sessionId(event)
  const person = id ? await touchSession(database(), id, { demo: environment().DEMO === 'on' }) : null
  event.context.person = person
  return person
}

/** A new session with a new id, whatever cookie came along. */
export async function signInAs(event: H3Event, userId: number, userAgent: string | undefined): Promise<void> {
  await signOut(event)
  const id = await beginSession(database(), userId, userAgent)
  await setUserSession(event, { secure: { sessionId: id } } as never)
}

export async function signOut(event: H3Event): Promise<void> {
  const id = await sessionId(event)
  if (!id) return
  await endSession(database(), id)
  await clearUserSession(event)
}
