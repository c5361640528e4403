import { getSettings } from '../../services/settings'

/** Who is signed in, and what every page needs to know of the site. */
export default defineEventHandler(async (event) => {
  const { userId, email, name, role } = await requireRole(event, 'viewer')
  const { siteName, zone } = await getSettings(database())
  return { person: { id: userId, email, name, role }, site: { siteName, zone, demo: environment().DEMO === 'on' } }
})
