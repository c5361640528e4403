import { importLoopList } from '../../services/loops/importLoopList'

export default defineEventHandler(async (event) => {
  const caller = await requireRole(event, 'engineer', 'import')
  return importLoopList(database(), await readBytes(event, 16 * 1024 * 1024), caller)
})
