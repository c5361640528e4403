import { listActiveNames } from '../../../db/repositories/users'

/** Whom work can be given to. */
export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  return await listActiveNames(database(), { withDemo: environment().DEMO === 'on' })
})
