import { settingsChangeSchema } from '../../../shared/schemas/settings'
import { changeSettings } from '../../services/settings'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  return await changeSettings(database(), await readInput(event, settingsChangeSchema), by)
})
