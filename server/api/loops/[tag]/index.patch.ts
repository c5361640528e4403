import { loopChangeSchema, loopTagSchema } from '../../../../shared/schemas/loops'
import { changeLoop } from '../../../services/loops/changeLoop'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer')
  const { tag } = await readInput(event, loopTagSchema, 'params')
  return changeLoop(database(), caller, tag, await readInput(event, loopChangeSchema))
})
