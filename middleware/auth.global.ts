import { atLeast, type Role } from '#shared/types/people'

/** Pages are for people who are signed in, except those with `definePageMeta({ open: true })`; `role` asks for more. */
export default defineNuxtRouteMiddleware(async (to) => {
  const session = useSessionStore()
  if (to.meta.open) return
  try { await session.load() }
  catch (error) {
    throw createError({ statusCode: 503, message: toFailure(error).message, fatal: true })
  }
  if (!session.person) return navigateTo({ path: '/sign-in', query: to.fullPath === '/' ? {} : { next: to.fullPath } })
  const role = to.meta.role as Role | undefined
  if (role && !atLeast(session.person.role, role)) throw createError({ statusCode: 403, message: `This page is for the role ${role}; yours is ${session.person.role}.`, fatal: true })
})
