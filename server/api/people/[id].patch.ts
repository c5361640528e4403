import { changePersonSchema, idSchema } from '../../../shared/schemas/people'
import { changePerson } from '../../services/people/changePerson'

export default defineEventHandler(async (event) => {
  const by = await requireRole(event, 'admin')
  const { id } = await readInput(event, idSchema, 'params')
  await changePerson(database(), id, await readInput(event, changePersonSchema), by)
  return { changed: true }
})
