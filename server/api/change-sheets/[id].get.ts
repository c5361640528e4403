import { sheetIdSchema } from '../../../shared/schemas/tuning'
import { readSheet } from '../../services/tuning/readSheets'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  return readSheet(database(), (await readInput(event, sheetIdSchema, 'params')).id)
})
