import { readJudgedPrecision } from '../../services/verdicts/readJudgedPrecision'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'engineer')
  return readJudgedPrecision(database())
})
