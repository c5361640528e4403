import { z } from 'zod'
import { listImports } from '../../../db/repositories/imports'
import { importView } from '../../services/imports/importView'

const querySchema = z.object({ limit: z.coerce.number().int().min(1).max(200).default(50), offset: z.coerce.number().int().min(0).default(0) })

export default defineEventHandler(async (event) => {
  await requireImportReader(event)
  const { total, rows } = await listImports(database(), await readInput(event, querySchema, 'query'))
  // what recognition found belongs to the page of one import
  return { total, rows: rows.map(row => ({ ...importView(row), mapping: undefined })) }
})
