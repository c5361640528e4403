import { answerMapping } from '../../../services/imports/answerMapping'
import { mappingAnswerSchema } from '../../../services/imports/importOptions'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer', 'import')
  const { id } = await readImportId(event)
  await answerMapping(database(), id, await readInput(event, mappingAnswerSchema), caller)
  setResponseStatus(event, 202)
  return { id, status: 'received' }
})
