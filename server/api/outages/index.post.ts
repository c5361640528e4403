import { setResponseStatus } from 'h3'
import { outageSchema } from '../../../shared/schemas/people'
import { addOutage } from '../../services/outages'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'engineer')
  const made = await addOutage(database(), await readInput(event, outageSchema), by)
  setResponseStatus(event, 201)
  return made
})
