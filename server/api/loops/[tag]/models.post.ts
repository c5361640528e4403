import { loopTagSchema } from '../../../../shared/schemas/loops'
import { findModelSchema } from '../../../../shared/schemas/tuning'
import { findModel } from '../../../services/tuning/findModel'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  return findModel(database(), tag, await readInput(event, findModelSchema))
})
