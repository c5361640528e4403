import { importView } from '../../../services/imports/importView'

export default defineEventHandler(async (event) => {
  await requireImportReader(event)
  return importView(await readImportId(event))
})
