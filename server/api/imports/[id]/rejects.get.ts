import { listRejects } from '../../../../db/repositories/importRejects'
import { rejectsCsv } from '../../../services/imports/rejectsCsv'

export default defineEventHandler(async (event) => {
  await requireImportReader(event)
  const { id } = await readImportId(event)
  setHeader(event, 'content-type', 'text/csv; charset=utf-8')
  setHeader(event, 'content-disposition', `attachment; filename="import-${id}-rejects.csv"`)
  return rejectsCsv(await listRejects(database(), id, 20_000))
})
