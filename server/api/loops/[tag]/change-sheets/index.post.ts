import { loopTagSchema } from '../../../../../shared/schemas/loops'
import { makeSheetSchema } from '../../../../../shared/schemas/tuning'
import { makeSheet } from '../../../../services/tuning/makeSheet'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  const made = await makeSheet(database(), caller, tag, await readInput(event, makeSheetSchema))
  setResponseStatus(event, 201)
  return made
})
