import { z } from 'zod'
import { buildDigest } from '../../services/digest/buildDigest'
import { renderDigest } from '../../../shared/digest/renderDigest'

const query = z.object({ week: z.string().regex(/^\d{4}-W\d{2}$/), areas: z.string().regex(/^\d+(,\d+)*$/).optional() })

export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer')
  const { week, areas } = await readInput(event, query, 'query')
  const publicUrl = environment().PUBLIC_URL
  const model = await buildDigest(database(), { week, areaIds: areas?.split(',').map(Number) ?? [], publicUrl, now: new Date() })
  return { ...renderDigest(model, `${publicUrl}/u/preview`), week, loops: model.loops }
})
