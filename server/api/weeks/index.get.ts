import { listWeeks } from '../../../db/repositories/loopWeeks'
import { getSettings } from '../../services/settings'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const [settings, weeks] = await Promise.all([getSettings(database()), listWeeks(database())])
  return { site: settings.siteName, zone: settings.zone, weeks }
})
