import { fleetQuerySchema } from '../../../shared/schemas/fleet'
import { fleetCsv } from '../../services/fleet/fleetCsv'
import { listFleet } from '../../services/fleet/listFleet'

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const query = await readInput(event, fleetQuerySchema, 'query')
  const answer = await listFleet(database(), query, new Date())
  if (query.format === 'json') return answer
  setHeader(event, 'content-type', 'text/csv; charset=utf-8')
  setHeader(event, 'content-disposition', `attachment; filename="loops-${answer.week}.csv"`)
  return fleetCsv(answer.rows, query.columns)
})
